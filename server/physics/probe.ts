/** Time constant of a first-order probe from its time to 90 % of a step: τ = T90 / ln 10, s. */
export function lag_s(T90_s: number): number {
  return T90_s / Math.LN10
}

/**
 * A first-order probe in a medium whose temperature goes in a straight line.
 *
 *     τ dT_s/dt = T − T_s     T_s(t) = T(t) − τ r + (T_s0 − T_0 + τ r) e^(−t/τ)     r = dT/dt
 *
 * @param before_C  what the probe showed at the start
 * @param from_C    medium at the start
 * @param to_C      medium at the end
 * @param τ_s       time constant; 0: no lag
 * @param dt_s      ≥ 0
 * @returns         what it shows at the end, °C; exact
 */
export function lagged_C(
  before_C: number,
  from_C: number,
  to_C: number,
  τ_s: number,
  dt_s: number,
): number {
  if (!(dt_s > 0)) return before_C
  if (!(τ_s > 0)) return to_C
  const behind = (τ_s * (to_C - from_C)) / dt_s
  return to_C - behind + (before_C - from_C + behind) * Math.exp(-dt_s / τ_s)
}
