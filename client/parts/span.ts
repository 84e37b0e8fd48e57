export const minute_ms = 60_000
/** What is seen at first: the last hour and a half, and as far ahead as the forecast reaches. */
export const behind_ms = 90 * minute_ms
export const ahead_ms = 40 * minute_ms
const narrowest_ms = 5 * minute_ms
const widest_ms = 400 * 86_400_000
/** Points asked for: more than a screen has pixels would not be seen. */

/** Null follows the clock; a span stays where somebody put it. */
export type Span = { readonly from_ms: number; readonly until_ms: number } | null

export const zoomed = (span: { from_ms: number; until_ms: number }, factor: number) => {
  const wide = Math.max(narrowest_ms, Math.min(widest_ms, (span.until_ms - span.from_ms) * factor))
  const middle = (span.from_ms + span.until_ms) / 2
  return { from_ms: middle - wide / 2, until_ms: middle + wide / 2 }
}

export const panned = (span: { from_ms: number; until_ms: number }, share: number) => {
  const by = (span.until_ms - span.from_ms) * share
  return { from_ms: span.from_ms + by, until_ms: span.until_ms + by }
}
