import { z } from 'zod'
import { instant } from './must.js'
import { ProbeId } from './site.js'

/**
 * How far a reading may be believed, as it was received. Only `good`, `historic` and
 * `late entry` readings may bear on an estimate; `retained` and `bad` ones are kept and shown.
 */
export const Quality = z.enum(['good', 'bad', 'retained', 'historic', 'late entry'])
export type Quality = z.infer<typeof Quality>

export const TimeSource = z.enum(['device', 'receipt', 'relative'])
export type TimeSource = z.infer<typeof TimeSource>

/** One line of an export, a replay file or `npm run -s readings` (interfaces.md §2). */
export const ReadingLine = z.strictObject({
  probe: ProbeId,
  t: instant,
  receivedAt: instant.optional(),
  /** As sent, before calibration. Null where the probe sent no number. */
  celsius: z.number().nullable(),
  seq: z.int().min(-1).optional(),
  quality: Quality.optional(),
  timeSource: TimeSource.optional(),
})
export type ReadingLine = z.infer<typeof ReadingLine>

/** One temperature of one probe at one instant, inside the program. Key: (probe, t_ms, seq). */
export type Reading = {
  readonly probe: ProbeId
  readonly t_ms: number
  readonly receivedAt_ms: number
  /** As sent, before calibration; null where no number was sent. */
  readonly celsius: number | null
  /** −1 where the sender gave none: never NULL in a key (rulings.md 12). */
  readonly seq: number
  readonly quality: Quality
  readonly timeSource: TimeSource
}

/** A device clock more than this ahead of receipt is wrong: kept, quality bad (architecture.md §1.5). */
export const aheadOfReceipt_ms = 5 * 60_000

/** A reading line as the program holds it. `t` stands for a missing receipt time. */
export const readingOf = (line: ReadingLine): Reading => {
  const t_ms = Date.parse(line.t)
  const receivedAt_ms = line.receivedAt === undefined ? t_ms : Date.parse(line.receivedAt)
  const quality = line.celsius === null ? 'bad' : (line.quality ?? 'good')
  return {
    probe: line.probe,
    t_ms,
    receivedAt_ms,
    celsius: line.celsius,
    seq: line.seq ?? -1,
    quality: t_ms - receivedAt_ms > aheadOfReceipt_ms ? 'bad' : quality,
    timeSource: line.timeSource ?? 'device',
  }
}

/** An instant as interfaces write it: UTC, whole seconds without a fraction, else milliseconds. */
export const rfc3339 = (t_ms: number): string => new Date(t_ms).toISOString().replace('.000Z', 'Z')

/** A reading as one line of an export. */
export const lineOf = (r: Reading): ReadingLine => ({
  probe: r.probe,
  t: rfc3339(r.t_ms),
  receivedAt: rfc3339(r.receivedAt_ms),
  celsius: r.celsius,
  ...(r.seq === -1 ? {} : { seq: r.seq }),
  ...(r.quality === 'good' ? {} : { quality: r.quality }),
  ...(r.timeSource === 'device' ? {} : { timeSource: r.timeSource }),
})
