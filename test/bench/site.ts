import { readSite } from '../../config/schema/readSite.js'
import type { SiteFile } from '../../config/schema/site.js'

/** An invented site of any size: one probed item for each probe, ten to a storage unit. */
export const siteOfSize = (items: number, placedAt: string): SiteFile => {
  const index = Array.from({ length: items }, (_, i) => i)
  return readSite({
    format: 'hoarline-site/1',
    site: { id: 'bench', name: 'Bench', zone: 'UTC' },
    products: [
      {
        id: 'saline',
        name: 'Saline 0.9 %',
        freezing: { kind: 'osmolality', osmolality_osmol_kg: 0.287, relU: 0.02, water_kg_kg: 0.99 },
        nucleation: 'clean-solution',
      },
    ],
    containers: [{ id: 'vial', fill_kg: 0.01, wall_kJ_K: 0.009, UA_W_K: 0.02 }],
    storageUnits: Array.from({ length: Math.ceil(items / 10) }, (_, u) => ({
      id: `U${u}`,
      kind: 'cold room',
    })),
    items: index.map((i) => ({
      id: `I${i}`,
      product: 'saline',
      container: 'vial',
      count: 10,
      storageUnit: `U${Math.floor(i / 10)}`,
      placedAt,
      initial_C: 5,
    })),
    probes: index.map((i) => ({
      id: `P${i}`,
      placement: 'in-item',
      interval_s: 60,
      source: { topic: `bench/${i}`, payload: 'senml', name: `urn:dev:ow:bench-${i}` },
    })),
    assignments: index.map((i) => ({ probe: `P${i}`, to: { item: `I${i}` }, from: placedAt })),
  })
}

/** Temperature of item i at minute k: a slow cool-down that differs from item to item. */
export const temperature_C = (i: number, k: number): number =>
  Math.round((5 - 6 * (1 - Math.exp(-k / (30 + (i % 17))))) * 20) / 20
