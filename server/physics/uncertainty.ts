/**
 * Standard normal distribution function.
 *
 * @returns P(Z ≤ z), within 1.2e-7 relative (Numerical Recipes' Chebyshev fit of erfc)
 */
export function normalCdf(z: number): number {
  const x = Math.abs(z) / Math.SQRT2
  const t = 1 / (1 + x / 2)
  const poly = [
    -1.26551223, 1.00002368, 0.37409196, 0.09678418, -0.18628806, 0.27886807, -1.13520398,
    1.48851587, -0.82215223, 0.17087277,
  ].reduceRight((sum, c) => sum * t + c, 0)
  const tail = (t * Math.exp(-x * x + poly)) / 2
  return z > 0 ? 1 - tail : tail
}

/** Coefficients of Acklam's rational approximations of the normal quantile. */
const a = [
  -3.969683028665376e1, 2.209460984245205e2, -2.759285104469687e2, 1.38357751867269e2,
  -3.066479806614716e1, 2.506628277459239,
] as const
const b = [
  -5.447609879822406e1, 1.615858368580409e2, -1.556989798598866e2, 6.680131188771972e1,
  -1.328068155288572e1, 1,
] as const
const c = [
  -7.784894002430293e-3, -3.223964580411365e-1, -2.400758277161838, -2.549732539343734,
  4.374664141464968, 2.938163982698783,
] as const
const d = [
  7.784695709041462e-3, 3.224671290700398e-1, 2.445134137142996, 3.754408661907416, 1,
] as const

const horner = (cs: readonly number[], x: number): number => cs.reduce((sum, k) => sum * x + k, 0)

/**
 * Standard normal quantile: z with P(Z ≤ z) = p.
 *
 * @param p  0 < p < 1; the ends give −∞ and ∞
 * @returns  within 1.2e-9 relative (Acklam's algorithm)
 */
export function normalQuantile(p: number): number {
  if (!(p > 0)) return Number.NEGATIVE_INFINITY
  if (!(p < 1)) return Number.POSITIVE_INFINITY
  const low = 0.02425
  if (p > 1 - low) return -normalQuantile(1 - p)
  if (p < low) {
    const q = Math.sqrt(-2 * Math.log(p))
    return horner(c, q) / horner(d, q)
  }
  const q = p - 0.5
  return (q * horner(a, q * q)) / horner(b, q * q)
}

/**
 * Combined standard uncertainty of independent parts (GUM 5.1.2).
 *
 *     u = √Σ u_k²
 */
export function combined_u(parts: readonly number[]): number {
  return Math.hypot(...parts)
}

/**
 * Probability that a temperature lies below a line, both normal (JCGM 106).
 *
 *     p = Φ((line − T)/u)
 *
 * @param u_K  combined standard uncertainty of T and line; 0: sure, and ½ on the line itself
 */
export function belowProbability(T_C: number, line_C: number, u_K: number): number {
  if (u_K > 0) return normalCdf((line_C - T_C) / u_K)
  return T_C < line_C ? 1 : T_C > line_C ? 0 : 0.5
}

/** Half width of a uniform distribution as a standard uncertainty (GUM 4.3.7): a/√3. */
export function rectangular_u(halfWidth: number): number {
  return halfWidth / Math.sqrt(3)
}
