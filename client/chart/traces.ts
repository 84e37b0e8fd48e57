import type { ItemReadings } from '../../config/schema/api.js'
import type { Placement } from '../../config/schema/site.js'

export type Point = { x: number; y: number | null }

/** A probe's readings, its gaps left open, and apart from them what is not to be believed. */
export type Trace = {
  readonly probe: string
  readonly placement: Placement
  readonly good: Point[]
  readonly doubtful: Point[]
}

/** A span in which no probe of the item was heard. */
export type Gap = { readonly from_ms: number; readonly until_ms: number }

/** Readings further apart than this many intervals leave a gap. */
const gapAfter_intervals = 3

const believable = (quality: string): boolean =>
  quality === 'good' || quality === 'late entry' || quality === 'historic'

const median = (values: readonly number[]): number =>
  [...values].sort((a, b) => a - b)[Math.floor(values.length / 2)] ?? 0

/** What was thinned for the screen has longer steps than its interval: those are no gaps. */
const gapFrom_ms = (times: readonly number[], interval_s: number): number => {
  const steps = times.slice(1).map((t, i) => t - (times[i] ?? t))
  return gapAfter_intervals * Math.max(interval_s * 1000, median(steps))
}

/** Readings for a line that breaks where nothing was heard; never bridged. */
export const tracesOf = (readings: ItemReadings): readonly Trace[] =>
  readings.probes.map(({ probe, placement, interval_s, points }) => {
    const limit_ms = gapFrom_ms(
      points.map(([t]) => t),
      interval_s,
    )
    const good: Point[] = []
    const doubtful: Point[] = []
    let last_ms: number | null = null
    for (const [t_ms, celsius, quality] of points) {
      if (celsius === null) continue
      if (!believable(quality)) {
        doubtful.push({ x: t_ms, y: celsius })
        continue
      }
      if (last_ms !== null && t_ms - last_ms > limit_ms)
        good.push({ x: (last_ms + t_ms) / 2, y: null })
      good.push({ x: t_ms, y: celsius })
      last_ms = t_ms
    }
    return { probe, placement, good, doubtful }
  })

/** Spans without a believable reading of any probe, up to now. */
export const gapsOf = (readings: ItemReadings, now_ms: number): readonly Gap[] => {
  const times = readings.probes
    .flatMap((p) => p.points.filter(([, c, q]) => c !== null && believable(q)).map(([t]) => t))
    .sort((a, b) => a - b)
  const quickest_s = Math.min(...readings.probes.map((p) => p.interval_s))
  if (times.length === 0 || !Number.isFinite(quickest_s)) return []
  const limit_ms = gapFrom_ms(times, quickest_s)
  return [...times, now_ms].flatMap((until_ms, i) => {
    const from_ms = times[i - 1]
    return from_ms !== undefined && until_ms - from_ms > limit_ms ? [{ from_ms, until_ms }] : []
  })
}
