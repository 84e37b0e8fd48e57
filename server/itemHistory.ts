import type { Judgement } from '../config/schema/verdict.js'
import type { Estimate } from './store/history.js'
import type { Reader } from './store/reader.js'
import type { Plan } from './watch/plan.js'

/** A track on the Waterline goes back so far, and holds a point a minute. */
const track_ms = 3_600_000
const every_ms = 60_000
/** Changes looked through at a start for the standing's age and an announced turn. */
const looked = 500

export type ItemHistory = {
  since_ms: number
  announcedTurned_ms: number | null
  readonly track: [number, number][]
}

/**
 * What a screen needs to know of an item's past: since when it stands so, whether a turn was ever
 * announced, and its last hour. It is remembered here and found again on disk after a restart.
 */
export const historyOf = (plan: Plan, reader: Reader, now_ms: number) => {
  const items = plan.items.map((item): ItemHistory => {
    const trail = reader.trail(item.id, looked) // newest first
    const standing = trail[0]?.standing
    const earlier = trail.findIndex((j) => j.standing !== standing)
    const oldest = earlier === -1 ? trail.at(-1) : trail[earlier - 1]
    // Stock that was placed frozen is Turned too, but nobody announced it.
    const turned = trail.filter((j) => j.standing === 'Turned' && !j.asIntended)
    return {
      since_ms: oldest?.t_ms ?? item.placed_ms,
      announcedTurned_ms: turned.at(-1)?.t_ms ?? null,
      track: reader
        .estimates(item.id, now_ms - track_ms, null, track_ms / every_ms)
        .map(([t_ms, , , margin_K]) => [t_ms, margin_K]),
    }
  })
  const at = (index: number): ItemHistory => {
    const history = items[index]
    if (history === undefined) throw new Error(`item ${index} is not in the plan`)
    return history
  }
  return {
    at,
    /** A change that was announced now. */
    changed(index: number, j: Judgement, before: Judgement | null): void {
      const history = at(index)
      if (before === null || before.standing !== j.standing) history.since_ms = j.t_ms
      if (j.standing === 'Turned' && !j.asIntended) history.announcedTurned_ms ??= j.t_ms
    },
    /**
     * A verdict as shown; every minute of data time it joins the track.
     *
     * @returns the estimate to be kept on disk, or null
     */
    shown(index: number, j: Judgement): Estimate | null {
      const { track } = at(index)
      const last_ms = track.at(-1)?.[0] ?? Number.NEGATIVE_INFINITY
      if (j.temperature_C === null || j.u_K === null || j.margin_K === null) return null
      if (j.t_ms - last_ms < every_ms) return null
      track.push([j.t_ms, Math.round(j.margin_K * 1000) / 1000])
      while (track[0] !== undefined && track[0][0] < j.t_ms - track_ms) track.shift()
      return {
        item: j.item,
        t_ms: j.t_ms,
        temperature_C: j.temperature_C,
        u_K: j.u_K,
        margin_K: j.margin_K,
      }
    },
  }
}
