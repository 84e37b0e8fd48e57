import { inForce } from '../config/schema/inForce.js'
import type { Container, Product } from '../config/schema/product.js'
import { Refusal } from '../config/schema/refusal.js'
import type { Scenario } from '../config/schema/scenario.js'
import type { Probe, SiteFile } from '../config/schema/site.js'
import type { SoluteTable } from '../server/physics/solution.js'
import { substanceOf } from '../server/physics/substance.js'
import { type Branches, branchesOf } from './branches.js'
import { normal, type Random, seedOf, uniform } from './random.js'

/** Shells an item is cut into, from the outside in: enough for the inner gradient to show. */
export const shells = 4

/** What does not change while a simulation runs: the true figures, which the site file only guesses. */
export type World = {
  readonly scenario: Scenario
  readonly site: SiteFile
  readonly start_ms: number
  readonly units: readonly WorldUnit[]
  readonly items: readonly WorldItem[]
  readonly probes: readonly WorldProbe[]
}

export type WorldUnit = {
  readonly id: string
  readonly ambient_C: number
  readonly setPoint_C: number
  readonly band_K: number
  readonly leak_s: number
  readonly pull_K: number
}

export type WorldItem = {
  readonly id: string
  readonly unit: number
  readonly branches: Branches
  readonly shell_kg: number
  readonly wall_kJ_K: number
  /** True coupling to the air, W/K; off the site file's by up to 20 %. */
  readonly UA_W_K: number
  /** Coupling between neighbouring shells, and of the outer one to the wall, W/K. */
  readonly inner_W_K: number
  /** How much warmer than the air probe's its own air is. */
  readonly position_K: number
  readonly fill_m3: number
  readonly count: number
  readonly initial_C: number
  readonly startsFrozen: boolean
  readonly kappa_m3s: number
  readonly b: number
}

export type WorldProbe = {
  readonly id: string
  readonly probe: Probe
  /** Index of what it touches; −1 where it touches none. */
  readonly item: number
  readonly unit: number
  readonly lag_s: number
  readonly bias_K: number
  readonly noise_K: number
  readonly interval_s: number
  readonly phase_s: number
  readonly mute: boolean
}

/** Share of the product's temperature in a probe on the outside of a wall [common practice: 0.6–0.85]. */
export const wallShare = 0.75

const named = <T extends { readonly id: string }>(
  list: readonly T[],
  id: string,
  field: string,
): T => {
  const found = list.find((x) => x.id === id)
  if (found !== undefined) return found
  throw new Refusal(
    'unknown-reference',
    field,
    id,
    'the site file has no such entry',
    `use one of ${list.map((x) => x.id).join(', ')}`,
  )
}

const indexOf = (ids: readonly string[], id: string, field: string): number => {
  named(
    ids.map((x) => ({ id: x })),
    id,
    field,
  )
  return ids.indexOf(id)
}

/**
 * Surface of a container as a coupling between its shells: a body whose inner coupling is so many
 * times its outer one has a mild inner gradient, as still liquid in a small container has.
 */
const innerOverOuter = 9

const itemOf = (
  site: SiteFile,
  units: readonly WorldUnit[],
  scenario: Scenario,
  solutes: SoluteTable,
  seed: number,
  branches: Map<string, Branches>,
  i: number,
): WorldItem => {
  const item = site.items[i]
  if (item === undefined) throw new Error('an item without a row')
  const at_ms = Date.parse(scenario.start)
  const products = site.products.map((p): Product => inForce(p, at_ms))
  const containers = site.containers.map((c): Container => inForce(c, at_ms))
  const product = named(products, item.product, `items[${i}].product`)
  const container = named(containers, item.container, `items[${i}].container`)
  const unit = indexOf(
    units.map((u) => u.id),
    item.storageUnit,
    `items[${i}].storageUnit`,
  )
  const r: Random = { state: seedOf(seed, item.id) }
  const kinetics = scenario.kinetics[product.nucleation] ?? {
    log10Kappa: -30,
    b: 20,
    spread_decades: 0,
  }
  const known = branches.get(product.id) ?? branchesOf(substanceOf(physicsOf(product), solutes))
  branches.set(product.id, known)
  const UA_W_K = (container.UA_W_K ?? 0.05) * (0.85 + 0.3 * uniform(r))
  const setPoint_C = units[unit]?.setPoint_C ?? 5
  return {
    id: item.id,
    unit,
    branches: known,
    shell_kg: container.fill_kg / shells,
    wall_kJ_K: Math.max(container.wall_kJ_K, 0.02 * container.fill_kg),
    UA_W_K,
    inner_W_K: UA_W_K * innerOverOuter,
    position_K: 0.6 * (uniform(r) - 0.5),
    fill_m3: container.fill_kg / 1000,
    count: item.count,
    initial_C: item.initial_C ?? setPoint_C,
    startsFrozen:
      (item.initial_C ?? setPoint_C) < known.substance.freezingPoint_C &&
      (product.harm === 'thawing' || item.previouslyFrozen || product.harm === 'meant-part-frozen'),
    kappa_m3s: 10 ** (kinetics.log10Kappa + kinetics.spread_decades * normal(r)),
    b: kinetics.b,
  }
}

const physicsOf = (p: Product) => ({
  freezing: p.freezing,
  ...(p.liquidOther_cp_kJ_kgK === undefined
    ? {}
    : { liquidOther_cp_kJ_kgK: p.liquidOther_cp_kJ_kgK }),
  ...(p.stop_C === undefined ? {} : { stop_C: p.stop_C }),
  ...(p.stop === undefined ? {} : { stop: p.stop }),
})

const probeOf = (
  probe: Probe,
  site: SiteFile,
  itemIds: readonly string[],
  unitIds: readonly string[],
  scenario: Scenario,
  seed: number,
): WorldProbe => {
  const to = site.assignments.find((a) => a.probe === probe.id)?.to
  const r: Random = { state: seedOf(seed, 'probe', probe.id) }
  const offset_K =
    probe.calibration === undefined
      ? 0
      : inForce(probe.calibration, Date.parse(scenario.start)).offset_K
  const item = to !== undefined && 'item' in to ? itemIds.indexOf(to.item) : -1
  return {
    id: probe.id,
    probe,
    item,
    unit: to !== undefined && 'storageUnit' in to ? unitIds.indexOf(to.storageUnit) : -1,
    lag_s: probe.T90_s / Math.LN10,
    // The calibration takes out what it knows of; what is left lies well within the accuracy.
    bias_K: -offset_K + 0.5 * probe.accuracy_K * (2 * uniform(r) - 1),
    noise_K: Math.max(0.01, probe.resolution_K / 3),
    interval_s: probe.interval_s,
    phase_s: Math.floor(uniform(r) * Math.min(60, probe.interval_s)),
    mute: scenario.mute.includes(probe.id) || scenario.tryProbe === probe.id || to === undefined,
  }
}

/**
 * A scenario on its site, with the true figures drawn from the seed.
 *
 * @throws Refusal where the scenario names what the site file lacks
 */
export const worldOf = (
  scenario: Scenario,
  site: SiteFile,
  solutes: SoluteTable,
  seed: number,
): World => {
  const at_ms = Date.parse(scenario.start)
  const given = site.storageUnits.map((u) => inForce(u, at_ms))
  const units = given.map((u): WorldUnit => {
    const climate = scenario.climates.find((c) => c.storageUnit === u.id)
    const setPoint_C = climate?.setPoint_C ?? u.setPoint_C ?? 5
    return {
      id: u.id,
      ambient_C: u.ambient_C ?? 20,
      setPoint_C,
      band_K: climate?.band_K ?? 0.8,
      leak_s: (climate?.leak_h ?? 3) * 3600,
      pull_K: climate?.pull_K ?? 25,
    }
  })
  const unitIds = units.map((u) => u.id)
  const itemIds = site.items.map((i): string => i.id)
  const probeIds = site.probes.map((p): string => p.id)
  for (const [i, c] of scenario.climates.entries())
    indexOf(unitIds, c.storageUnit, `climates[${i}].storageUnit`)
  for (const [i, a] of scenario.acts.entries()) {
    if ('storageUnit' in a) indexOf(unitIds, a.storageUnit, `acts[${i}].storageUnit`)
    if ('item' in a) indexOf(itemIds, a.item, `acts[${i}].item`)
    if ('probe' in a) indexOf(probeIds, a.probe, `acts[${i}].probe`)
  }
  const branches = new Map<string, Branches>()
  return {
    scenario,
    site,
    start_ms: at_ms,
    units,
    items: site.items.map((_, i) => itemOf(site, units, scenario, solutes, seed, branches, i)),
    probes: site.probes.map((p) => probeOf(p, site, itemIds, unitIds, scenario, seed)),
  }
}
