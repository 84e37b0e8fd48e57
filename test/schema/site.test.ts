import { describe, expect, test } from 'vitest'
import { readSite, siteRefusals } from '../../config/schema/readSite.js'

const small = () => ({
  format: 'hoarline-site/1',
  site: { id: 'kettleby', name: 'Kettleby Store', zone: 'Europe/Lisbon' },
  products: [
    {
      id: 'saline',
      name: 'Saline 0.9 %',
      freezing: { kind: 'osmolality', osmolality_osmol_kg: 0.287, relU: 0.02, water_kg_kg: 0.99 },
      harm: 'freezing',
    },
  ],
  containers: [{ id: 'vial', fill_kg: 0.01, UA_W_K: 0.02 }],
  storageUnits: [{ id: 'CR-1', kind: 'cold room' }],
  items: [
    {
      id: 'B2',
      product: 'saline',
      container: 'vial',
      count: 12,
      storageUnit: 'CR-1',
      placedAt: '2026-01-05T00:00:00Z',
    },
  ],
  probes: [{ id: 'P-07', placement: 'in-item', source: { topic: 'a/b', payload: 'senml' } }],
  assignments: [{ probe: 'P-07', to: { item: 'B2' }, from: '2026-01-05T00:00:00Z' }],
})

const change = (path: string, value: unknown) => {
  const site = small()
  const keys = path.split('.')
  const last = keys.pop() ?? ''
  const at = keys.reduce<unknown>((o, k) => (o as Record<string, unknown>)[k], site)
  ;(at as Record<string, unknown>)[last] = value
  return site
}

describe('a site file', () => {
  test('that is right is read, with every default filled in', () => {
    const site = readSite(small())
    expect(site.policy).toMatchObject({
      poisedChance: 0.05,
      poisedHorizon_h: 8,
      chanceQuantile: 'high',
      lead_min: 30,
    })
    expect(site.probes[0]).toMatchObject({
      T90_s: 60,
      accuracy_K: 0.5,
      interval_s: 60,
      role: 'monitor',
    })
    expect(site.items[0]).toMatchObject({ removedAt: null, moves: [], previouslyFrozen: false })
  })

  test.each([
    {
      path: 'probes.0.T90_s',
      value: 0,
      field: 'probes[0].T90_s',
      says: /a lag is never 0; give the time to 90 % of a step/,
    },
    {
      path: 'probes.0.placment',
      value: 'x',
      field: 'probes[0].placment',
      says: /did you mean "placement"/,
    },
    {
      path: 'products.0.freezing.osmolality_osmol_kg',
      value: 287,
      field: 'products[0].freezing.osmolality_osmol_kg',
      says: /divided by 1000/,
    },
    {
      path: 'products.0.freezing.relu',
      value: 0.02,
      field: 'products[0].freezing.relu',
      says: /did you mean "relU"/,
    },
    {
      path: 'products.0.harm',
      value: 'frezing',
      field: 'products[0].harm',
      says: /did you mean "freezing"/,
    },
    {
      path: 'products.0.freezing.kind',
      value: 'osmolarity',
      field: 'products[0].freezing.kind',
      says: /did you mean "osmolality"/,
    },
    {
      path: 'items.0.product',
      value: 'salime',
      field: 'items[0].product',
      says: /did you mean "saline"/,
    },
    { path: 'items.0.placedAt', value: 'yesterday', field: 'items[0].placedAt', says: /RFC 3339/ },
    { path: 'items.0.count', value: 0, field: 'items[0].count', says: /at least one container/ },
    {
      path: 'assignments.0.until',
      value: '2025-01-05T00:00:00Z',
      field: 'assignments[0].until',
      says: /not after/,
    },
    { path: 'site.zone', value: 'Europe/Lissabon', field: 'site.zone', says: /IANA/ },
    { path: 'format', value: 'hoarline-site/2', field: 'format', says: /hoarline-site\/1/ },
    {
      path: 'probes.0.source.topik',
      value: 'x',
      field: 'probes[0].source.topik',
      says: /did you mean "topic"/,
    },
    {
      path: 'policy',
      value: { poisedChance: 5 },
      field: 'policy.poisedChance',
      says: /0.05 for 5 %/,
    },
  ])(
    'with a wrong $path is refused with field, value and remedy',
    ({ path, value, field, says }) => {
      const [first] = siteRefusals(change(path, value))
      expect(first?.field).toBe(field)
      expect(first?.message).toMatch(says)
    },
  )

  test('that gives an id twice is refused', () => {
    const site = small()
    site.items.push({ ...site.items[0]! })
    expect(siteRefusals(site)[0]).toMatchObject({ code: 'duplicate', field: 'items[1].id' })
  })

  test('may give a product as a history, and refuses one whose times do not rise', () => {
    const product = small().products[0]
    const history = (a: string, b: string) =>
      change('products.0', {
        history: [
          { from: a, approvedBy: 'M. Olsen', value: product },
          { from: b, approvedBy: 'M. Olsen', value: product },
        ],
      })
    expect(siteRefusals(history('2026-01-01T00:00:00Z', '2026-02-01T00:00:00Z'))).toEqual([])
    expect(
      siteRefusals(history('2026-02-01T00:00:00Z', '2026-01-01T00:00:00Z'))[0]?.message,
    ).toMatch(/do not rise/)
  })
})
