/**
 * Quantiles of a weighted spread of numbers over many decades, each a little smeared, without a
 * sort. One scratch pad serves all callers: a spread is begun, filled and read in one go.
 */

const lnLeast = -120
const binWidth = 0.25
/** From e^−120, which is as good as never, to e^30. */
const bins = 600
/** Narrowest smear, in bins: an edge narrower than its own bin would be a step. */
const least = 0.02

/** Changes of density from bin to bin. */
const edges = new Float64Array(bins + 2)
let below = 0
let all = 0

/** Begins a new spread. */
export function beginSpread(): void {
  edges.fill(0)
  below = 0
  all = 0
}

/**
 * Adds a weight evenly from e^(ln − half) to e^(ln + half).
 *
 * @param ln    logarithm of the number; −∞ for 0
 * @param half  half of the width over which it is smeared
 */
export function addToSpread(ln: number, half: number, weight: number): void {
  all += weight
  const middle = Math.min((ln - lnLeast) / binWidth, bins - 1)
  const reach = Math.max(half / binWidth, least)
  if (!(middle > reach)) {
    below += weight
    return
  }
  const from = middle - reach
  const to = Math.min(middle + reach, bins)
  const density = weight / (to - from)
  edge(from, density)
  edge(to, -density)
}

/** A change between two bins is shared by them, so that the weight below stays exact. */
const edge = (at: number, change: number): void => {
  const k = Math.trunc(at)
  const f = at - k
  edges[k] = edges[k]! + change * (1 - f)
  edges[k + 1] = edges[k + 1]! + change * f
}

/**
 * The number below which a share of all weight lies.
 *
 * @param p  0 … 1
 * @returns  0 where so much weight lies at numbers that are as good as 0
 */
export function quantileOfSpread(p: number): number {
  const want = p * all
  if (want <= below) return 0
  let before = below
  let density = 0
  for (let k = 0; k < bins; k++) {
    density += edges[k]!
    if (before + density >= want && density > 0)
      return Math.exp(lnLeast + (k + (want - before) / density) * binWidth)
    before += density
  }
  return Math.exp(lnLeast + bins * binWidth)
}
