/**
 * A Gaussian over a few unknowns as plain numbers: the mean, then the lower triangle of the
 * covariance, row by row. One flat array copies fast, and JSON gives it back bit for bit.
 */
export type Gauss = number[]

/** Number of unknowns from the length n + n(n+1)/2. */
export const sizeOf = (g: readonly number[]): number =>
  Math.round((Math.sqrt(9 + 8 * g.length) - 3) / 2)

/** Where the covariance of unknowns i and j stands. */
export const at = (n: number, i: number, j: number): number =>
  i >= j ? n + (i * (i + 1)) / 2 + j : n + (j * (j + 1)) / 2 + i

/**
 * A Gaussian of independent unknowns.
 *
 * @param mean      of each
 * @param variance  of each, not negative
 */
export function independent(mean: readonly number[], variance: readonly number[]): Gauss {
  const n = mean.length
  const g: Gauss = [...mean, ...new Array<number>((n * (n + 1)) / 2).fill(0)]
  for (let i = 0; i < n; i++) g[at(n, i, i)] = variance[i] ?? 0
  return g
}

/** The most unknowns an item may have: four of its own and three for each of six probes. */
export const mostUnknowns = 22
const room = mostUnknowns * mostUnknowns
/** Work space: these functions run to their end without yielding, so one copy is enough. */
const FP = new Float64Array(room)

/**
 * Covariance after one linear step, P ← F P Fᵀ + diag(q). The mean is left alone.
 *
 * @param g  changed in place
 * @param F  n × n, by rows; rows that are those of the identity cost little
 * @param q  variance added to each unknown, not negative
 */
export function carryCovariance(g: Gauss, n: number, F: Float64Array, q: Float64Array): void {
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      let sum = 0
      for (let k = 0; k < n; k++) {
        const f = F[i * n + k]!
        if (f !== 0) sum += f * g[at(n, k, j)]!
      }
      FP[i * n + j] = sum
    }
  }
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = 0
      for (let k = 0; k < n; k++) {
        const f = F[j * n + k]!
        if (f !== 0) sum += FP[i * n + k]! * f
      }
      g[n + (i * (i + 1)) / 2 + j] = i === j ? sum + q[i]! : sum
    }
  }
}

/** Smallest variance kept: rounding must not make one negative. */
const leastVariance = 1e-14

/**
 * One scalar measurement of the sum of two unknowns (Kalman 1960). With i = j, of one alone.
 *
 *     K = P H / S      x ← x + K ν      P ← P − K Hᵀ P
 *
 * @param g           changed in place
 * @param innovation  reading less what was expected
 * @param S           variance of the innovation, above 0
 */
export function correct(
  g: Gauss,
  n: number,
  i: number,
  j: number,
  innovation: number,
  S: number,
): void {
  const PH = FP
  for (let k = 0; k < n; k++) PH[k] = i === j ? g[at(n, k, i)]! : g[at(n, k, i)]! + g[at(n, k, j)]!
  for (let k = 0; k < n; k++) {
    const gain = PH[k]! / S
    g[k] = g[k]! + gain * innovation
    for (let l = 0; l <= k; l++) {
      const place = n + (k * (k + 1)) / 2 + l
      g[place] = g[place]! - gain * PH[l]!
    }
    const own = at(n, k, k)
    if (g[own]! < leastVariance) g[own] = leastVariance
  }
}

/** Variance of the sum of two unknowns; with i = j, of one alone. */
export const varianceOfSum = (g: readonly number[], n: number, i: number, j: number): number =>
  i === j ? g[at(n, i, i)]! : g[at(n, i, i)]! + g[at(n, j, j)]! + 2 * g[at(n, i, j)]!

/**
 * One Gaussian with the moments of a mixture of two.
 *
 * @param a      changed in place into the mixture
 * @param share  of `b`, 0 … 1
 */
export function mix(a: Gauss, b: readonly number[], n: number, share: number): void {
  if (share <= 0) return
  const rest = 1 - share
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const place = n + (i * (i + 1)) / 2 + j
      const apart = (b[i]! - a[i]!) * (b[j]! - a[j]!)
      a[place] = rest * a[place]! + share * b[place]! + rest * share * apart
    }
  }
  for (let i = 0; i < n; i++) a[i] = rest * a[i]! + share * b[i]!
}
