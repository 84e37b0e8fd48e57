import type { Act } from '../config/schema/scenario.js'
import { enthalpy_kJ_kg, iceOf_kg_kg, temperature_C } from './branches.js'
import { normal, type Random, seedOf, uniform } from './random.js'
import { shells, type World, type WorldItem, type WorldProbe, wallShare } from './world.js'

/**
 * The site as it truly is, run forward: the same physics that the watch reckons with, but with
 * shells, a wall, a coupling and a position of its own that nobody told the watch.
 *
 *     dh_k/dt = [G (T_{k−1} − T_k) + G (T_{k+1} − T_k)] / m_shell        each shell
 *     C_w dT_w/dt = UA (T_air − T_w) + G (T_1 − T_w)                     the wall
 */

/** One step, s: the fastest coupling (wall to outer shell of a small vial) stays stable under it. */
export const step_s = 5

export type UnitState = { air_C: number; cooling: boolean }
export type ItemState = {
  /** Enthalpy of each shell, from the outside in, kJ/kg. */
  h: number[]
  wall_C: number
  /** Second at which it turned; −1 while liquid. */
  turned_s: number
  turnedFrom_C: number
  /** How many of the others of its batch have turned. */
  othersTurned: number
}
export type ProbeState = { sensor_C: number; seq: number; next_s: number }

/** Everything that changes. Plain JSON: saved and taken up again, it goes on to the same bit. */
export type SimState = {
  t_s: number
  random: number
  units: UnitState[]
  items: ItemState[]
  probes: ProbeState[]
}

/** A reading as the simulated probe sends it. */
export type Sent = {
  readonly probe: number
  readonly t_s: number
  readonly celsius: number
  readonly seq: number
}

export type Turn = { readonly item: number; readonly t_s: number; readonly from_C: number }

/** The acts of a script as they fall: repeats laid out, shifted by the seed alone. */
export const isOn = (act: Act, t_s: number, length_s: number, seed: number): number => {
  const period = act.every_s ?? Number.POSITIVE_INFINITY
  if (t_s < act.at_s) return -1
  const k = period === Number.POSITIVE_INFINITY ? 0 : Math.floor((t_s - act.at_s) / period)
  if (act.until_s !== undefined && act.at_s + (k > 0 ? k * period : 0) > act.until_s) return -1
  const r: Random = { state: seedOf(seed, act.act, act.at_s, k) }
  const from_s = act.at_s + (k > 0 ? k * period : 0) + act.jitter_s * uniform(r)
  const since_s = t_s - from_s
  return since_s >= 0 && since_s < length_s ? since_s : -1
}

export const temperaturesOf = (item: WorldItem, state: ItemState): number[] =>
  state.h.map((h) => temperature_C(item.branches, state.turned_s >= 0, h))

const mean = (values: readonly number[]): number =>
  values.reduce((a, b) => a + b, 0) / values.length

/** Mass-mean temperature of the product, °C. */
export const meanTemperature_C = (item: WorldItem, state: ItemState): number =>
  mean(temperaturesOf(item, state))

/** Mass-mean ice, kg per kg of product. */
export const meanIce_kg_kg = (item: WorldItem, state: ItemState): number =>
  mean(temperaturesOf(item, state).map((t) => iceOf_kg_kg(item.branches, state.turned_s >= 0, t)))

/**
 * A world at rest: every body at its initial temperature, the air at its set point.
 *
 * @param from_s  seconds since the world's start at which it begins
 */
export const freshState = (world: World, seed: number, from_s = 0): SimState => ({
  t_s: from_s,
  random: seedOf(seed, 'run'),
  units: world.units.map((u) => ({ air_C: u.setPoint_C, cooling: false })),
  items: world.items.map((item) => ({
    h: Array.from({ length: shells }, () =>
      enthalpy_kJ_kg(item.branches, item.startsFrozen, item.initial_C),
    ),
    wall_C: item.initial_C,
    turned_s: item.startsFrozen ? from_s : -1,
    turnedFrom_C: item.initial_C,
    othersTurned: item.startsFrozen ? item.count - 1 : 0,
  })),
  probes: world.probes.map((p) => ({
    sensor_C:
      p.item >= 0 ? (world.items[p.item]?.initial_C ?? 5) : (world.units[p.unit]?.setPoint_C ?? 5),
    seq: 0,
    next_s: from_s + p.phase_s,
  })),
})

/** Air of a storage unit over one step: its leak, its cooling with hysteresis, what the script does. */
const stepUnit = (world: World, state: SimState, index: number, seed: number, r: Random): void => {
  const unit = world.units[index]
  const now = state.units[index]
  if (unit === undefined || now === undefined) return
  let setPoint_C = unit.setPoint_C
  let defrost_C: number | null = null
  let door = false
  for (const act of world.scenario.acts) {
    if (!('storageUnit' in act) || act.storageUnit !== unit.id) continue
    const length_s = (('minutes' in act ? act.minutes : undefined) ?? Number.POSITIVE_INFINITY) * 60
    if (isOn(act, state.t_s, length_s, seed) < 0) continue
    if (act.act === 'set point') setPoint_C = act.to_C
    if (act.act === 'defrost') defrost_C = act.peak_C
    if (act.act === 'door') door = true
  }
  if (defrost_C !== null) now.cooling = false
  else if (now.air_C > setPoint_C + unit.band_K) now.cooling = true
  else if (now.air_C < setPoint_C - unit.band_K) now.cooling = false
  const defrost_s = 500
  const pull_s = 1500
  const door_s = 240
  let slope = (unit.ambient_C - now.air_C) / unit.leak_s
  if (now.cooling) slope += (setPoint_C - unit.pull_K - now.air_C) / pull_s
  if (defrost_C !== null) slope += (defrost_C - now.air_C) / defrost_s
  if (door) slope += (unit.ambient_C - now.air_C) / (door_s * 6)
  now.air_C += slope * step_s + 0.01 * normal(r)
}

const turn = (state: SimState, index: number, turns: Turn[], item: WorldItem): void => {
  const now = state.items[index]
  if (now === undefined || now.turned_s >= 0) return
  const from_C = meanTemperature_C(item, now)
  now.turned_s = state.t_s
  now.turnedFrom_C = from_C
  turns.push({ item: index, t_s: state.t_s, from_C })
}

const stepItem = (world: World, state: SimState, index: number, r: Random, turns: Turn[]): void => {
  const item = world.items[index]
  const now = state.items[index]
  const air = state.units[item?.unit ?? -1]
  if (item === undefined || now === undefined || air === undefined) return
  const T = temperaturesOf(item, now)
  const G = item.inner_W_K
  const air_C = air.air_C + item.position_K
  // The wall is light: what it touches is held for the step, and its own balance solved exactly. The
  // outer shell meets the wall's mean over the step, so that no heat is made or lost between them.
  const drive = item.UA_W_K + G
  const goal_C = (item.UA_W_K * air_C + G * (T[0] ?? 0)) / drive
  const steps = (drive * step_s) / (1000 * item.wall_kJ_K)
  const kept = Math.exp(-steps)
  const wallMean_C = goal_C + ((now.wall_C - goal_C) * (1 - kept)) / steps
  now.wall_C = goal_C + (now.wall_C - goal_C) * kept
  for (let k = 0; k < shells; k++) {
    const outer = k === 0 ? wallMean_C : (T[k - 1] ?? 0)
    const own = T[k] ?? 0
    const inner = k === shells - 1 ? own : (T[k + 1] ?? 0)
    const watts = G * (outer - own) + G * (inner - own)
    now.h[k] = (now.h[k] ?? 0) + (watts * step_s) / (1000 * item.shell_kg)
  }
  const depth_K = item.branches.substance.freezingPoint_C - Math.min(...T)
  const liquid = now.turned_s < 0
  if (depth_K > 0) {
    // λ = V κ (ΔT/10)^b. For the batch the coldest shell stands for all.
    const events = item.fill_m3 * item.kappa_m3s * (depth_K / 10) ** item.b * step_s
    const chance = 1 - Math.exp(-events)
    if (liquid && chance > 1e-12 && uniform(r) < chance) turn(state, index, turns, item)
    const left = item.count - 1 - now.othersTurned
    if (left > 0 && chance > 1e-9)
      for (let n = 0; n < Math.min(left, 50); n++)
        if (uniform(r) < (chance * left) / Math.min(left, 50)) now.othersTurned += 1
    now.othersTurned = Math.min(now.othersTurned, item.count - 1)
  }
  // Melted through and warm: liquid again, though it has been frozen.
  if (
    !liquid &&
    !item.startsFrozen &&
    Math.min(...T) > item.branches.substance.freezingPoint_C + 1
  ) {
    now.turned_s = -1
  }
}

/** What a probe touches at this instant, °C. */
const touched_C = (world: World, state: SimState, probe: WorldProbe): number => {
  const item = world.items[probe.item]
  const now = state.items[probe.item]
  if (item === undefined || now === undefined) return state.units[probe.unit]?.air_C ?? Number.NaN
  const T = temperaturesOf(item, now)
  switch (probe.probe.placement) {
    case 'on-item-wall':
      return wallShare * (T[0] ?? 0) + (1 - wallShare) * (state.units[item.unit]?.air_C ?? 0)
    case 'in-air':
    case 'in-buffer':
      return state.units[item.unit]?.air_C ?? 0
    case 'in-item':
    case 'in-witness':
      return mean(T.slice(shells / 2))
  }
}

const stepProbe = (
  world: World,
  state: SimState,
  index: number,
  seed: number,
  r: Random,
  sent: Sent[],
): void => {
  const probe = world.probes[index]
  const now = state.probes[index]
  if (probe === undefined || now === undefined || probe.mute) return
  const target = touched_C(world, state, probe)
  now.sensor_C = target + (now.sensor_C - target) * Math.exp(-step_s / probe.lag_s)
  if (state.t_s < now.next_s) return
  const t_s = now.next_s
  now.next_s += probe.interval_s
  now.seq += 1
  const noise = probe.noise_K * normal(r) // drawn even when silent: a script must not shift the rest
  let code: number | null = null
  for (const act of world.scenario.acts) {
    if (!('probe' in act) || act.probe !== probe.id || isOn(act, t_s, act.minutes * 60, seed) < 0)
      continue
    if (act.act === 'probe silent') return
    code = act.code_C
  }
  const grain = Math.max(probe.probe.resolution_K, 0.001)
  const read = Math.round((now.sensor_C + probe.bias_K + noise) / grain) * grain
  sent.push({ probe: index, t_s, celsius: code ?? Math.round(read * 1000) / 1000, seq: now.seq })
}

/**
 * Runs the site forward to an instant, in steps of 5 s.
 *
 * @param state  given away: it is changed in place and is the result
 * @param to_s   seconds since the start
 * @returns      readings sent and turns that happened on the way, in order
 */
export const advance = (
  world: World,
  state: SimState,
  to_s: number,
  seed: number,
): { sent: Sent[]; turns: Turn[] } => {
  const sent: Sent[] = []
  const turns: Turn[] = []
  const r: Random = { state: state.random }
  while (state.t_s + step_s <= to_s) {
    state.t_s += step_s
    for (let i = 0; i < world.units.length; i++) stepUnit(world, state, i, seed, r)
    for (let i = 0; i < world.items.length; i++) stepItem(world, state, i, r, turns)
    for (const act of world.scenario.acts) {
      if (act.act !== 'nucleate') continue
      const since = isOn(act, state.t_s, 2 * step_s, seed)
      const index = world.items.findIndex((i) => i.id === act.item)
      const item = world.items[index]
      const now = state.items[index]
      if (since < 0 || item === undefined || now === undefined) continue
      if (meanTemperature_C(item, now) < item.branches.substance.freezingPoint_C - act.ifBelow_K)
        turn(state, index, turns, item)
    }
    for (let i = 0; i < world.probes.length; i++) stepProbe(world, state, i, seed, r, sent)
  }
  state.random = r.state
  return { sent, turns }
}
