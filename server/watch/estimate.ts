import { at, carryCovariance, type Gauss, mostUnknowns } from './gauss.js'
import { heatCapacity_kJ_kgK, ice_kg_kg, type Matter, temperature_C } from './matter.js'
import type { SlotPrior } from './slots.js'

/**
 * The unknowns of an item on one branch, in this order:
 *
 *   h  enthalpy per kg of product, wall included, kJ/kg
 *   δ  how much warmer its own surroundings are than the air reading that serves it, K
 *      (without such a reading: their temperature, °C)
 *   λ  ln of its coupling over the configured one
 * and for each probe that touches it
 *   a  share of the product in what the probe touches; the rest is its surroundings
 *   s  temperature of the sensor, °C
 *   b  bias of the probe, K
 */
export const H = 0
export const Δ = 1
export const Λ = 2
export const own = 3
export const perSlot = 3
export const shareOf = (slot: number): number => own + perSlot * slot
export const sensorOf = (slot: number): number => own + perSlot * slot + 1
export const biasOf = (slot: number): number => own + perSlot * slot + 2

/** What drives an item through one interval. */
export type Drive = {
  readonly dt_s: number
  /** Air at the start, its mean over the interval and at the end, °C; 0 where no air is known. */
  readonly base0_C: number
  readonly baseMean_C: number
  readonly base1_C: number
  /** Share of δ that is kept over the interval, and variance that comes to it, K². */
  readonly keep: number
  readonly deltaQ_K2: number
  /** Lag of each probe, s. */
  readonly tau_s: readonly number[]
  /** Does the probe touch the surroundings themselves (on a wall), or only the body's gradient? */
  readonly outside: readonly boolean[]
  /** Surroundings as the inside of the body has felt them, over its own time of conduction, °C. */
  readonly felt_C: number
  /** What was believed of each probe at first: what is learned of it is forgotten again. */
  readonly slots: readonly SlotPrior[]
}

const F = new Float64Array(mostUnknowns * mostUnknowns)
const q = new Float64Array(mostUnknowns)

/** Temperature change within one sub-step on ice, K: the apparent heat capacity varies along it. */
const subStep_K = 0.4
/** Bound on sub-steps: a body that needs more has long reached its surroundings. */
const mostSubSteps = 24
/** Own wandering of a body in still surroundings, K² per s: about 0.03 K in 10 min [common practice]. */
const wander_K2_s = 1.5e-6
/** Coupling noise within an interval: convection comes and goes [common practice]. */
const couplingNoise = 0.06
/** Slow drifts of coupling (frost, stacking) and of what the probe touches, per s. */
const lambdaDrift_s = 1e-8
/**
 * How long what was learned of a probe's bias and of what it touches is relied on, s. Model and
 * reading differ by more than noise, so that hours of agreement would else pass for certainty.
 */
const biasKept_s = 6 * 3600
const shareKept_s = 3 * 3600

/** Slush has hardly a gradient inside; what is nearly solid conducts like any body. */
const slushGradient = 0.25
const slushUntil = 0.5
const solidFrom = 0.95

/** Share of the gradient of a still body that counts at an enthalpy with ice. */
export function inSlush(matter: Matter, h: number): number {
  const share = ice_kg_kg(matter, h) / matter.solidIce_kg_kg
  const x = (share - slushUntil) / (solidFrom - slushUntil)
  return slushGradient + (1 - slushGradient) * Math.min(1, Math.max(0, x))
}

/** How much of the inner gradient lies between the mean and the skin. */
export const skinShare = 0.8

/**
 * What ice changes in what a probe touches. Inside: the share of the gradient that is left. On the
 * wall: by how much the share of the product grows, its skin being as warm as its mean in slush.
 */
export function touchOnIce(matter: Matter, onIce: boolean, outside: boolean, h: number): number {
  if (!onIce) return 1
  const left = inSlush(matter, h)
  return outside ? 1 + skinShare * matter.gradient * (1 - left) : left
}

/** No probe feels more of the product than this, gradients inside it included. */
const shareMost = 1.15

/** How the new enthalpy leans on the surroundings: what a jump of them would have moved. */
export const leaning = { h: 0, sensor: new Float64Array(8) }

/**
 * Carries an item's Gaussian over an interval on one branch.
 *
 *     dh/dt = −(UA/m)(T(h) − T_env)       sensor: τ ds/dt = aT + (1 − a)T_env − s
 *
 * Exponential steps with the local apparent heat capacity: exact on the liquid branch.
 *
 * @param g      changed in place
 * @param onIce  true: T is read off the equilibrium branch
 */
export function carry(g: Gauss, n: number, matter: Matter, onIce: boolean, drive: Drive): void {
  const { dt_s } = drive
  const δ0 = g[Δ]!
  // The way from the mean to the skin is part of the coupling; in slush there is none.
  const skin = 1 + skinShare * matter.gradient * (onIce ? slushGradient : 1)
  const coupling = (matter.coupling_kW_kgK * Math.exp(g[Λ]!)) / skin
  const env = drive.baseMean_C + δ0
  const h0 = g[H]!
  const T0 = temperature_C(matter, onIce, h0)
  let h = h0
  let T = T0
  let φ = 1
  let toEnv = 0
  let left_s = dt_s
  let toΛ = 0
  for (let k = 0; k < mostSubSteps && left_s > 0; k++) {
    const c = heatCapacity_kJ_kgK(matter, onIce, h)
    const rate = coupling / c
    const gap = T - env
    let step_s = left_s
    if (onIce && k < mostSubSteps - 1) {
      const speed = Math.abs(gap) * rate
      if (speed * step_s > subStep_K) step_s = Math.max(subStep_K / speed, left_s / mostSubSteps)
      if (step_s > left_s) step_s = left_s
    }
    const f = Math.exp(-rate * step_s)
    const moved = -c * gap * (1 - f)
    toΛ = toΛ * f - c * gap * rate * step_s * f
    h += moved
    φ *= f
    toEnv = toEnv * f + c * (1 - f)
    T = temperature_C(matter, onIce, h)
    left_s -= step_s
  }
  const c0 = heatCapacity_kJ_kgK(matter, onIce, h0)
  const c1 = heatCapacity_kJ_kgK(matter, onIce, h)
  // Between branches of very different slope the exponential factor belongs to temperatures.
  const hh = φ
  F.fill(0, 0, n * n)
  F[H * n + H] = hh
  F[H * n + Δ] = toEnv
  F[H * n + Λ] = toΛ
  F[Δ * n + Δ] = drive.keep
  F[Λ * n + Λ] = 1
  // As heat, not as temperature: on a plateau a hundredth of a kelvin would be all of the ice.
  const cl = heatCapacity_kJ_kgK(matter, false, h)
  // It wanders and is pulled back: after a gap of months it is no less certain than after a day.
  const pull_per_s = coupling / cl
  const wandered_s = -Math.expm1(-2 * pull_per_s * dt_s) / (2 * pull_per_s)
  const change = cl * cl * wander_K2_s * wandered_s
  const flux = couplingNoise * (h - h0)
  q[H] = change + flux * flux
  q[Δ] = drive.deltaQ_K2
  q[Λ] = lambdaDrift_s * dt_s
  leaning.h = toEnv
  const δ1 = drive.keep * δ0
  for (let slot = 0; slot < drive.tau_s.length; slot++) {
    const a = shareOf(slot)
    const s = sensorOf(slot)
    const b = biasOf(slot)
    const τ = drive.tau_s[slot]!
    const outside = drive.outside[slot]!
    const soft = touchOnIce(matter, onIce, outside, h)
    const rest = outside ? 1 - g[a]! * soft : (1 - g[a]!) * soft
    // A gradient inside follows the surroundings slowly: a door must not move it at once.
    const env0 = outside ? drive.base0_C + δ0 : drive.felt_C
    const env1 = outside ? drive.base1_C + δ1 : drive.felt_C
    const direct = outside ? rest : 0
    const G0 = T0 + rest * (env0 - T0)
    const G1 = T + rest * (env1 - T)
    const f = Math.exp(-dt_s / τ)
    const lag = dt_s > 0 ? (τ * (1 - f)) / dt_s : 1
    const w1 = 1 - lag
    const w0 = lag - f
    const sensor = w1 * G1 + w0 * G0 + f * g[s]!
    const T1h = (1 - rest) / c1
    F[s * n + H] = w1 * T1h * hh + (w0 * (1 - rest)) / c0
    F[s * n + Δ] = w1 * (T1h * toEnv + direct * drive.keep) + w0 * direct
    F[s * n + Λ] = w1 * T1h * toΛ
    F[s * n + a] = soft * (w1 * (T - env1) + w0 * (T0 - env0))
    F[s * n + s] = f
    const prior = drive.slots[slot]!
    const keepA = Math.exp(-dt_s / shareKept_s)
    const keepB = Math.exp(-dt_s / biasKept_s)
    F[a * n + a] = keepA
    F[b * n + b] = keepB
    q[a] = prior.shareVar * (1 - keepA * keepA)
    q[s] = 0
    q[b] = prior.biasVar_K2 * (1 - keepB * keepB)
    g[a] = Math.min(shareMost, prior.share + keepA * (g[a]! - prior.share))
    g[b] = keepB * g[b]!
    leaning.sensor[slot] = F[s * n + Δ]!
    g[s] = sensor
  }
  g[H] = h
  g[Δ] = δ1
  carryCovariance(g, n, F, q)
}

/** Temperature of the product and its standard uncertainty from h alone, on one branch. */
export function product(
  g: readonly number[],
  n: number,
  matter: Matter,
  onIce: boolean,
): { T_C: number; u_K: number } {
  const c = heatCapacity_kJ_kgK(matter, onIce, g[H]!)
  return { T_C: temperature_C(matter, onIce, g[H]!), u_K: Math.sqrt(g[at(n, H, H)]!) / c }
}
