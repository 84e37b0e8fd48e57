/**
 * Seeded random numbers whose state is one integer, so that a saved simulation goes on to the
 * same bit (mulberry32, Ettinger 2017, public domain).
 */
export type Random = { state: number }

/** Uniform in [0, 1). */
export const uniform = (r: Random): number => {
  r.state = (r.state + 0x6d2b79f5) | 0
  let t = Math.imul(r.state ^ (r.state >>> 15), 1 | r.state)
  t = (t + Math.imul(t ^ (t >>> 7), 61 | t)) ^ t
  return ((t ^ (t >>> 14)) >>> 0) / 4294967296
}

/** Standard normal (Box, Muller 1958). */
export const normal = (r: Random): number =>
  Math.sqrt(-2 * Math.log(1 - uniform(r))) * Math.cos(2 * Math.PI * uniform(r))

/** A number that hangs on texts alone: the same probe gets the same bias in every run of a seed. */
export const seedOf = (...parts: readonly (string | number)[]): number => {
  let hash = 0x811c9dc5
  for (const byte of new TextEncoder().encode(parts.join('\u001f'))) {
    hash = Math.imul(hash ^ byte, 0x01000193)
  }
  return hash | 0
}
