import { unknownsOf } from './advance.js'
import { biasOf, H, Δ } from './estimate.js'
import { at } from './gauss.js'
import { heatCapacity_kJ_kgK, ice_kg_kg, type Matter, temperature_C } from './matter.js'
import type { Plan, PlannedItem } from './plan.js'
import type { Branch, ItemTrack } from './state.js'
import { normal } from './trust.js'

/** What the model leaves out, even in a still body, K [common practice]. */
const model_K = 0.03
/** A skin is not a product, however well the two were told apart, K and per K to the surroundings. */
const wall_K = 0.1
const wallShare = 0.03
/** Share of the inner gradient that the mean may be off by. */
const gradientShare = 0.3

/** Standard uncertainties that make up that of the margin, K (GUM: squares add). */
export type Budget = {
  readonly estimate_K: number
  readonly line_K: number
  readonly location_K: number
  readonly model_K: number
}

/** What a bank of stories says of an item, all stories by their weight. */
export type Estimate = {
  readonly T_C: number
  readonly u_K: number
  /** Standard uncertainty within the heaviest story: two clear stories are not one vague one. */
  readonly within_K: number
  readonly below: number
  /** Weight of ice now, and of ice at any time. */
  readonly icy: number
  readonly turned: number
  readonly ice_kg_kg: number
  /** Of the heaviest liquid branch. */
  readonly liquid_C: number | null
  readonly env_C: number
  readonly env_u_K: number
  readonly budget: Budget
}

type One = { T_C: number; var_K2: number; env_C: number; location_K: number; parts: Budget }

const ofBranch = (
  plan: Plan,
  item: PlannedItem,
  track: ItemTrack,
  b: Branch,
  matter: Matter,
): One => {
  const n = unknownsOf(item)
  const onIce = b.kind === 'ice'
  const h = b.g[H]!
  const c = heatCapacity_kJ_kgK(matter, onIce, h)
  let T_C = temperature_C(matter, onIce, h)
  const env_C = track.base_C + b.g[Δ]!
  const away_K = Math.abs(T_C - env_C)
  const walls = item.slots.length > 0 && item.slots.every((s) => s.kind === 'wall')
  const location_K =
    gradientShare * matter.gradient * away_K + (walls ? wall_K + wallShare * away_K : 0)
  const own2 = b.g[at(n, H, H)]! / (c * c)
  let line2 = 0
  if (onIce && h < matter.hFreezing) {
    // What was learned of bias and line together belongs to the line by its share of the variance.
    const uf2 = matter.uFreezing_K ** 2
    const k = item.slots.findIndex((s) => s.kind !== 'sibling')
    const accuracy_K =
      k < 0 ? Number.POSITIVE_INFINITY : plan.probes[item.slots[k]!.probe]!.given.accuracy_K
    const ub2 = accuracy_K ** 2 / 3
    const heard = k >= 0 && track.slots[k]!.trusted_ms >= b.to_ms && !b.placedAsIce
    if (heard) T_C += (b.g[biasOf(k)]! * uf2) / (uf2 + ub2)
    line2 = heard ? (uf2 * ub2) / (uf2 + ub2) : uf2
  }
  const var_K2 = own2 + line2 + location_K ** 2 + model_K ** 2
  return {
    T_C,
    var_K2,
    env_C,
    location_K,
    parts: { estimate_K: Math.sqrt(own2), line_K: Math.sqrt(line2), location_K, model_K },
  }
}

/**
 * The stories of a track as one estimate of the product.
 *
 * Where no probe could show ice, the estimate is that of the product still liquid: what the hazard
 * says stands beside it as a chance and does not blur it.
 *
 * @param measured  a probe touches the item
 */
export function reckoned(
  plan: Plan,
  item: PlannedItem,
  track: ItemTrack,
  measured: boolean,
): Estimate {
  const matter = item.matter[track.matter]!.value
  const apart = track.fork === null ? 0 : 1 / (1 + Math.exp(-track.fork.odds))
  const all = [
    ...track.bank.map((b) => ({ b, w: Math.exp(b.w) * (1 - apart) })),
    ...(track.fork?.bank ?? []).map((b) => ({ b, w: Math.exp(b.w) * apart })),
  ].filter((x) => x.w > 1e-9)
  const turned = all.reduce((s, x) => s + (x.b.kind === 'liquid' ? 0 : x.w), 0)
  const unseen = (x: (typeof all)[number]) => x.b.kind !== 'ice' || x.b.placedAsIce
  const liquidOnly = !measured && track.called === null && all.some(unseen)
  const stories = liquidOnly ? all.filter(unseen) : all
  const sum = stories.reduce((s, x) => s + x.w, 0)
  let T_C = 0
  let second = 0
  let below = 0
  let icy = 0
  let ice = 0
  let env_C = 0
  const ones = stories.map(({ b, w }) => ({
    b,
    w: w / sum,
    one: ofBranch(plan, item, track, b, matter),
  }))
  for (const { b, w, one } of ones) {
    T_C += w * one.T_C
    env_C += w * one.env_C
    const frozen = b.kind === 'ice' && b.g[H]! < matter.hFreezing
    const u = Math.hypot(Math.sqrt(one.var_K2), matter.uFreezing_K)
    below += w * (frozen ? 1 : normal((matter.freezing_C - one.T_C) / u))
    if (frozen) {
      icy += w
      ice += w * ice_kg_kg(matter, b.g[H]!)
    }
  }
  for (const { w, one } of ones) second += w * (one.var_K2 + (one.T_C - T_C) ** 2)
  // Ice that nobody could see still stands beside the liquid estimate: the band must hold it.
  if (liquidOnly)
    for (const { b, w } of all)
      if (!unseen({ b, w })) second += w * (ofBranch(plan, item, track, b, matter).T_C - T_C) ** 2
  const heaviest = ones.reduce((a, b) => (b.w > a.w ? b : a))
  const liquid = ones.filter((x) => x.b.kind !== 'ice').sort((a, b) => b.w - a.w)[0]
  const n = unknownsOf(item)
  return {
    T_C,
    u_K: Math.sqrt(second),
    within_K: Math.sqrt(heaviest.one.var_K2),
    below: Math.min(1, Math.max(0, below)),
    icy: Math.min(1, icy),
    turned: Math.min(1, turned),
    ice_kg_kg: ice,
    liquid_C: liquid?.one.T_C ?? null,
    env_C,
    env_u_K: Math.sqrt(heaviest.b.g[at(n, Δ, Δ)]!),
    budget: heaviest.one.parts,
  }
}
