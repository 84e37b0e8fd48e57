import type { Clock } from './seam.js'

/**
 * How a site's clock follows the wall's: it read `site_ms` when the wall's read `wall_ms`, and
 * runs `speed` times as fast. On a real site it is the wall's clock itself (rulings.md 2).
 */
export type ClockMap = {
  readonly wall_ms: number
  readonly site_ms: number
  readonly speed: number
}

/** The slowest and the fastest a demo may run, times real time. */
export const speeds = { least: 1, most: 600 } as const

export const siteTime_ms = (map: ClockMap, wall_ms: number): number =>
  Math.round(map.site_ms + (wall_ms - map.wall_ms) * map.speed)

/** The same clock at another speed from now on; it neither jumps nor runs back. */
export const atSpeed = (map: ClockMap, wall_ms: number, speed: number): ClockMap => ({
  wall_ms,
  site_ms: siteTime_ms(map, wall_ms),
  speed,
})

/**
 * The clock of one site.
 *
 * @param map   null on a real site
 * @param wall  the host's clock, replaced in tests
 */
export const siteClock = (
  map: ClockMap | null,
  wall: () => number = Date.now,
): Clock & { map(): ClockMap | null; setSpeed(speed: number): void } => {
  let current = map
  return {
    now_ms: () => (current === null ? wall() : siteTime_ms(current, wall())),
    map: () => current,
    setSpeed(speed) {
      if (current !== null) current = atSpeed(current, wall(), speed)
    },
  }
}
