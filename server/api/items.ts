import type { ItemReadings, ItemTrail, RefusedView } from '../../config/schema/api.js'
import { inForce } from '../../config/schema/inForce.js'
import { Refusal } from '../../config/schema/refusal.js'
import type { Item, SiteFile } from '../../config/schema/site.js'
import type { Say } from '../../config/words/say.js'
import { placeOf } from '../board.js'
import type { Refused } from '../seam.js'
import type { Reader } from '../store/reader.js'
import type { Watcher } from '../watcher.js'

/** Unless asked otherwise, an item sheet shows so much of the past. */
const usual_ms = 2 * 3_600_000
/** Changes of a verdict that a trail shows at most. */
const trailLength = 200

const itemOf = (site: SiteFile, id: string): Item => {
  const item = site.items.find((i) => i.id === id)
  if (item !== undefined) return item
  throw new Refusal(
    'not-found',
    'id',
    id,
    'there is no such stored item',
    'take an id from /api/v1/items',
  )
}

/** Probes that bore on an item within a span: in it, on it, in its witness, or in its storage unit. */
const probesOf = (site: SiteFile, item: Item, from_ms: number, until_ms: number) => {
  const units = new Set([placeOf(item, from_ms).storageUnit, placeOf(item, until_ms).storageUnit])
  const wanted = new Set<string>()
  for (const a of site.assignments) {
    if (Date.parse(a.from) >= until_ms || (a.until !== null && Date.parse(a.until) <= from_ms))
      continue
    const bears =
      'item' in a.to
        ? a.to.item === item.id || a.to.item === item.witness
        : units.has(a.to.storageUnit)
    if (bears) wanted.add(a.probe)
  }
  return site.probes.filter((p) => wanted.has(p.id))
}

/** What was read and what was reckoned of an item over a span, thinned so that no extreme is lost. */
export const itemReadings = async (
  from: { site: SiteFile; reader: Reader; watch: Watcher; now_ms: () => number },
  id: string,
  span: { from_ms: number | null; until_ms: number | null; points: number },
): Promise<ItemReadings> => {
  const item = itemOf(from.site, id)
  const now_ms = from.now_ms()
  const until_ms = span.until_ms ?? now_ms + 1
  const from_ms = span.from_ms ?? until_ms - usual_ms
  if (!(from_ms < until_ms))
    throw new Refusal(
      'backwards',
      'from',
      from_ms,
      'it is not before `until`',
      'give an earlier time',
    )
  const outlook = await from.watch.outlook(id, now_ms)
  return {
    from_ms,
    until_ms,
    probes: probesOf(from.site, item, from_ms, until_ms).map((p) => ({
      probe: p.id,
      placement: p.placement,
      interval_s: p.interval_s,
      offset_K: p.calibration === undefined ? 0 : inForce(p.calibration, until_ms).offset_K,
      points: from.reader.points(p.id, from_ms, until_ms, span.points),
    })),
    estimate: from.reader
      .estimates(id, from_ms, until_ms, span.points)
      .map(([t_ms, temperature_C, u_K]) => [t_ms, temperature_C, u_K] as const),
    forecast: outlook?.forecast ?? [],
    chance: outlook?.chance ?? [],
  }
}

/** The changes of an item's verdict, newest first, in sentences. */
export const itemTrail = (
  from: { site: SiteFile; reader: Reader; say: Say },
  id: string,
): ItemTrail => {
  itemOf(from.site, id)
  return from.reader.trail(id, trailLength).map((j) => ({
    t_ms: j.t_ms,
    standing: j.standing,
    phase: j.phase,
    evidence: j.evidence,
    margin_K: j.margin_K,
    why: j.why.map(({ key, values }) => from.say(key, values)),
  }))
}

/** The longest part of a refused payload that a page shows; the whole is kept. */
const shownBytes = 400

/** A refused payload for a page: as text where it is text, else its bytes in hexadecimal. */
export const refusedView = ({ payload, notice: _, ...row }: Refused): RefusedView => {
  const shown = payload.subarray(0, shownBytes)
  const text = new TextDecoder().decode(shown)
  const isText = !/\ufffd|(?![\t\r\n])\p{Cc}/u.test(text)
  return { ...row, payload: isText ? text : Buffer.from(shown).toString('hex') }
}
