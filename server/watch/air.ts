import type { PlannedProbe } from './plan.js'
import type { AirTrack, UnitTrack } from './state.js'
import { isStuck, looksFahrenheit, noiseAfter, runOf } from './trust.js'

/** How fast the air of a store wanders: 1 K in a minute (doors, compressor) [common practice]. */
const wanderAir_K2_s = 1 / 60
/** A buffer cannot show the fast part: what is asked of it is the mean over its own lag. */
const wanderBuffer_K2_s = 0.04 / 60
const noise_K = 0.05

/** Intervals after which a probe of the air no longer speaks for it. */
const staleIntervals = 3

const freshAir = (probe: PlannedProbe, t_ms: number, y_C: number, raw_C: number): AirTrack => {
  const variance = 0.25 + probe.tau_s * 1e-4
  return {
    probe: probe.index,
    t_ms,
    air_C: y_C,
    sensor_C: y_C,
    P: [variance, 0, 0.05],
    trusted_ms: t_ms,
    trusted_C: y_C,
    raw_C,
    before_C: null,
    same: 1,
    sameFrom_ms: t_ms,
    sameLog: 0,
    noise_K2: 0,
    stuck: false,
  }
}

/**
 * One reading of a probe of the air: its lag undone by a filter of two unknowns, the air (a random
 * walk) and the sensor that follows it.
 */
const heardAir = (
  last: AirTrack,
  probe: PlannedProbe,
  t_ms: number,
  y_C: number,
  raw_C: number,
): AirTrack => {
  const dt_s = (t_ms - last.t_ms) / 1000
  const q = probe.placement === 'in-buffer' ? wanderBuffer_K2_s : wanderAir_K2_s
  const f = Math.exp(-dt_s / probe.tau_s)
  const [aa, as, ss] = last.P
  const p11 = aa + q * dt_s
  // The air moves within the interval: half of its wandering reaches the sensor.
  const p12 = f * as + (1 - f) * (aa + (q * dt_s) / 2)
  const p22 = f * f * ss + 2 * f * (1 - f) * as + (1 - f) ** 2 * (aa + (q * dt_s) / 3)
  const expected = f * last.sensor_C + (1 - f) * last.air_C
  const R = noise_K ** 2 + probe.given.resolution_K ** 2 / 12
  const S = p22 + R
  const ν = y_C - expected
  const [ka, ks] = [p12 / S, p22 / S]
  const run = runOf(last, raw_C, t_ms, expected - last.sensor_C, probe.given.resolution_K)
  const noise_K2 = noiseAfter(last, raw_C, run.same, probe.given.resolution_K)
  const stuck = isStuck(run)
  return {
    ...last,
    t_ms,
    air_C: last.air_C + ka * ν,
    sensor_C: expected + ks * ν,
    P: [p11 - ka * p12, p12 - ks * p12, p22 - ks * p22],
    trusted_ms: stuck ? last.sameFrom_ms : t_ms,
    trusted_C: y_C,
    raw_C,
    before_C: last.raw_C,
    ...run,
    noise_K2,
    stuck,
  }
}

const fresh = (track: AirTrack, probes: readonly PlannedProbe[], t_ms: number): boolean =>
  !track.stuck && t_ms - track.trusted_ms < staleIntervals * probes[track.probe]!.interval_ms

/** The storage unit carried to an instant: its air held, its integral grown. */
export const heldTo = (unit: UnitTrack, t_ms: number): number =>
  unit.t_ms < 0 ? 0 : unit.integral_Ks + (unit.air_C * (t_ms - unit.t_ms)) / 1000

/**
 * A reading of the air or of a buffer in a storage unit. Probes in free air speak before buffers;
 * several of a kind are averaged.
 *
 * @param y_C    corrected by the calibration
 * @param raw_C  as sent
 */
export function hearAir(
  unit: UnitTrack,
  probe: PlannedProbe,
  probes: readonly PlannedProbe[],
  t_ms: number,
  y_C: number,
  raw_C: number,
): UnitTrack {
  const last = unit.probes.find((p) => p.probe === probe.index)
  // A step that only a change of unit explains: heard, not believed.
  if (last !== undefined && looksFahrenheit(y_C, last.trusted_C)) return unit
  const now =
    last === undefined ? freshAir(probe, t_ms, y_C, raw_C) : heardAir(last, probe, t_ms, y_C, raw_C)
  const all = [...unit.probes.filter((p) => p.probe !== probe.index), now].sort(
    (a, b) => a.probe - b.probe,
  )
  const live = all.filter((p) => fresh(p, probes, t_ms))
  const inAir = live.filter((p) => probes[p.probe]!.placement === 'in-air')
  const used = inAir.length > 0 ? inAir : live
  if (used.length === 0) return { ...unit, probes: all }
  const air_C = used.reduce((sum, p) => sum + p.air_C, 0) / used.length
  const variance = used.reduce((sum, p) => sum + p.P[0], 0) / used.length ** 2
  // Between two readings the air is taken to have moved in a straight line.
  const grown =
    unit.t_ms < 0 ? 0 : unit.integral_Ks + (((unit.air_C + air_C) / 2) * (t_ms - unit.t_ms)) / 1000
  return {
    ...unit,
    t_ms,
    source: inAir.length > 0 ? 'air' : 'buffer',
    air_C,
    mean_C: meanAfter(unit, t_ms, air_C),
    u_K: Math.sqrt(variance),
    integral_Ks: grown,
    probes: all,
  }
}

/** An item with a probe of its own tells, where nothing else does, how cold its neighbours stand. */
export function hearNeighbour(
  unit: UnitTrack,
  item: number,
  t_ms: number,
  env_C: number,
  u_K: number,
): UnitTrack {
  const grown =
    unit.t_ms < 0 || unit.source === 'none'
      ? 0
      : unit.integral_Ks + (((unit.air_C + env_C) / 2) * (t_ms - unit.t_ms)) / 1000
  return {
    ...unit,
    t_ms,
    source: 'neighbour',
    air_C: env_C,
    mean_C: meanAfter(unit, t_ms, env_C),
    u_K,
    integral_Ks: grown,
    neighbour: item,
    neighbour_ms: t_ms,
  }
}

/** Time over which the air is averaged for a forecast, s: some turns of a compressor. */
const mean_s = 900
/** A change larger than this is a new level, not a cycle, K. */
const newLevel_K = 3

const meanAfter = (unit: UnitTrack, t_ms: number, air_C: number): number => {
  if (unit.t_ms < 0 || unit.source === 'none') return air_C
  const f = Math.exp(-(t_ms - unit.t_ms) / 1000 / mean_s)
  const mean = f * unit.mean_C + (1 - f) * air_C
  return Math.abs(mean - air_C) > newLevel_K ? air_C : mean
}

/** Does a probe of the air, or in a buffer, speak for the storage unit at this instant? */
export const airSpeaks = (
  unit: UnitTrack,
  probes: readonly PlannedProbe[],
  t_ms: number,
  staleAfter: number,
): boolean =>
  unit.probes.some(
    (p) => !p.stuck && t_ms - p.trusted_ms < staleAfter * probes[p.probe]!.interval_ms,
  )
