const first_ms = 1000
const most_ms = 60_000

/**
 * How long to wait before the next try: exponential with full jitter, so that a hundred clients of
 * a broker that comes back do not all knock in the same second.
 *
 *     wait = random · min(60 s, 1 s · 2^failures)
 *
 * @param failures  tries that failed since the last good connection, from 0
 * @param random    0 ≤ r < 1
 * @source full jitter: Brooker 2015, "Exponential backoff and jitter" [from memory]
 */
export const backOff_ms = (failures: number, random: number, from_ms = first_ms): number =>
  random * Math.min(most_ms, from_ms * 2 ** Math.min(failures, 20))
