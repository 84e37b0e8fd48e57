import { everyValue, type OrHistory } from './inForce.js'
import { nearest, parse, refusalsOf } from './parse.js'
import { Refusal } from './refusal.js'
import { SiteFile } from './site.js'

type Named = { readonly id: string }

const idOf = <T extends Named>(given: OrHistory<T>): string => everyValue(given)[0]?.id ?? ''

/** The field of `name` in row i, repeated: 'items[3].id'. */
const twice = (list: string, ids: readonly string[]): Refusal[] =>
  ids.flatMap((id, i) =>
    ids.indexOf(id) === i
      ? []
      : [
          new Refusal(
            'duplicate',
            `${list}[${i}].id`,
            id,
            'another of this kind has the same id',
            'give each its own id',
          ),
        ],
  )

const mixedHistory = <T extends Named>(list: string, rows: readonly OrHistory<T>[]): Refusal[] =>
  rows.flatMap((row, i) => {
    const ids = new Set(everyValue(row).map((v) => v.id))
    const outer = typeof row === 'object' && 'history' in row ? row.id : undefined
    if (outer !== undefined) ids.add(outer)
    return ids.size <= 1
      ? []
      : [
          new Refusal(
            'mixed-history',
            `${list}[${i}].history`,
            [...ids],
            'one history holds several ids',
            'keep one id through a history',
          ),
        ]
  })

const pointsAt = (field: string, id: string, known: readonly string[], kind: string): Refusal[] => {
  if (known.includes(id)) return []
  const near = nearest(id, known)
  const remedy =
    near !== null
      ? `did you mean "${near}"?`
      : `add it to ${kind}, or use one of: ${known.slice(0, 12).join(', ')}`
  return [new Refusal('unknown-reference', field, id, `no such entry in ${kind}`, remedy)]
}

const endsAfter = (field: string, from: string, until: string | null): Refusal[] =>
  until === null || Date.parse(until) > Date.parse(from)
    ? []
    : [
        new Refusal(
          'backwards',
          field,
          until,
          `it is not after ${from}`,
          'give a later time, or null',
        ),
      ]

/** The shape a container must state so that its area can be had from `h_W_m2K`. */
const shapeNeeds: Record<string, readonly string[]> = {
  cylinder: ['radius_m', 'height_m'],
  sphere: ['radius_m'],
  slab: ['thickness_m'],
  box: ['length_m', 'width_m', 'height_m'],
}

/** What a site file says that contradicts itself: ids used twice, references into nothing, times backwards. */
export const contradictions = (site: SiteFile): Refusal[] => {
  const ids = {
    products: site.products.map(idOf),
    containers: site.containers.map(idOf),
    storageUnits: site.storageUnits.map(idOf),
    items: site.items.map((i): string => i.id),
    probes: site.probes.map((p): string => p.id),
  }
  const containers = site.containers.flatMap((row, i) =>
    everyValue(row).flatMap((c) => {
      if (c.h_W_m2K === undefined || c.UA_W_K !== undefined) return []
      const field = `containers[${i}].shape`
      if (c.shape === undefined)
        return [
          new Refusal(
            'missing',
            field,
            c.shape,
            'h_W_m2K needs the shape to find the area',
            'give the shape, or UA_W_K',
          ),
        ]
      return (shapeNeeds[c.shape] ?? [])
        .filter((name) => c[name as keyof typeof c] === undefined)
        .map(
          (name) =>
            new Refusal(
              'missing',
              `containers[${i}].${name}`,
              undefined,
              `a ${c.shape} needs it`,
              'give it in metres',
            ),
        )
    }),
  )
  const items = site.items.flatMap((item, i) => [
    ...pointsAt(`items[${i}].product`, item.product, ids.products, 'products'),
    ...pointsAt(`items[${i}].container`, item.container, ids.containers, 'containers'),
    ...pointsAt(`items[${i}].storageUnit`, item.storageUnit, ids.storageUnits, 'storageUnits'),
    ...(item.witness === undefined
      ? []
      : pointsAt(`items[${i}].witness`, item.witness, ids.items, 'items')),
    ...(item.splitFrom === undefined
      ? []
      : pointsAt(`items[${i}].splitFrom.item`, item.splitFrom.item, ids.items, 'items')),
    ...item.moves.flatMap((m, k) =>
      pointsAt(
        `items[${i}].moves[${k}].storageUnit`,
        m.storageUnit,
        ids.storageUnits,
        'storageUnits',
      ),
    ),
    ...endsAfter(`items[${i}].removedAt`, item.placedAt, item.removedAt),
  ])
  const assignments = site.assignments.flatMap((a, i) => [
    ...pointsAt(`assignments[${i}].probe`, a.probe, ids.probes, 'probes'),
    ...('item' in a.to
      ? pointsAt(`assignments[${i}].to.item`, a.to.item, ids.items, 'items')
      : pointsAt(
          `assignments[${i}].to.storageUnit`,
          a.to.storageUnit,
          ids.storageUnits,
          'storageUnits',
        )),
    ...endsAfter(`assignments[${i}].until`, a.from, a.until),
  ])
  return [
    ...Object.entries(ids).flatMap(([list, all]) => twice(list, all)),
    ...mixedHistory('products', site.products),
    ...mixedHistory('containers', site.containers),
    ...mixedHistory('storageUnits', site.storageUnits),
    ...containers,
    ...items,
    ...assignments,
    ...site.windows.flatMap((w, i) => [
      ...pointsAt(`windows[${i}].storageUnit`, w.storageUnit, ids.storageUnits, 'storageUnits'),
      ...endsAfter(`windows[${i}].until`, w.from, w.until),
    ]),
    ...site.learned.flatMap((l, i) =>
      l.item === undefined ? [] : pointsAt(`learned[${i}].item`, l.item, ids.items, 'items'),
    ),
  ]
}

/** Every reason to refuse a site file, of shape or of sense; empty when it may be used. */
export const siteRefusals = (json: unknown): Refusal[] => {
  const ofShape = refusalsOf(SiteFile, json)
  return ofShape.length > 0 ? ofShape : contradictions(parse(SiteFile, json))
}

/**
 * A site file, checked in shape and sense, defaults filled in.
 *
 * @throws Refusal of the first complaint
 */
export const readSite = (json: unknown): SiteFile => {
  const site = parse(SiteFile, json)
  const [first] = contradictions(site)
  if (first !== undefined) throw first
  return site
}
