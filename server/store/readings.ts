import type { Quality, TimeSource } from '../../config/schema/reading.js'
import type { ProbeId } from '../../config/schema/site.js'
import type { Arrival, Kept, LoggedReading, Offset, Part } from '../seam.js'
import type { Db } from './database.js'
import { namesTable } from './names.js'

/** Codes on disk; a place in these lists is never given to another word. */
export const qualities: readonly Quality[] = ['good', 'bad', 'retained', 'historic', 'late entry']
export const timeSources: readonly TimeSource[] = ['device', 'receipt', 'relative']
const retained = qualities.indexOf('retained')
const device = timeSources.indexOf('device')

export const hour_ms = 3_600_000
export const hourOf = (t_ms: number): number => Math.floor(t_ms / hour_ms)

/**
 * Messages of one probe, stamped by receipt, that one millisecond can hold. Beyond it they count
 * as a conflict: no probe of the trade sends a thousand readings in a millisecond.
 */
const sameMillisecond = 1000

type Row = {
  offset: number
  part: number
  probe: number
  hour: number
  t_ms: number
  seq: number
  received_ms: number
  celsius: number | null
  quality: number
  time_source: number
}
type Taken = { offset: number; celsius: number | null; quality: number }

const columns =
  'offset, part, probe, hour, t_ms, seq, received_ms, celsius, quality, time_source' as const
const values =
  '@offset, @part, @probe, @hour, @t_ms, @seq, @received_ms, @celsius, @quality, @time_source' as const

/** Readings as heard. The caller owns the transaction; no row is ever updated. */
export const readingsTable = (db: Db) => {
  const insert = db.prepare<Row>(
    `INSERT INTO reading (${columns}) VALUES (${values}) ON CONFLICT DO NOTHING`,
  )
  const key = 'hour = @hour AND probe = @probe AND t_ms = @t_ms AND seq = @seq'
  const first = db.prepare<Row, Taken>(`SELECT offset, celsius, quality FROM reading WHERE ${key}`)
  const others = db.prepare<Row, Taken>(
    `SELECT offset, celsius, quality FROM further_reading WHERE ${key}`,
  )
  const further = db.prepare<Row & { conflict: number }>(
    `INSERT INTO further_reading (${columns}, conflict) VALUES (${values}, @conflict)`,
  )
  const last = db
    .prepare<[], number>(
      'SELECT max(coalesce((SELECT max(offset) FROM reading), 0), coalesce((SELECT max(offset) FROM further_reading), 0))',
    )
    .pluck()
  const probes = namesTable(db, 'probe')

  const keepRow = (row: Row): { kept: Kept; offset: Offset; t_ms: number } => {
    if (insert.run(row).changes === 1) return { kept: 'new', offset: row.offset, t_ms: row.t_ms }
    const taken = [first.get(row), ...others.all(row)].filter((t) => t !== undefined)
    const same = taken.filter((t) => t.celsius === row.celsius)
    // A retained copy says nothing new of a reading that is here; but where only a retained copy
    // is here, the live one is the first that may bear on an estimate.
    const equal = same.find((t) => t.quality !== retained || row.quality === retained)
    if (equal !== undefined) return { kept: 'duplicate', offset: equal.offset, t_ms: row.t_ms }
    const conflict = same.length === 0 || taken.length > same.length
    further.run({ ...row, conflict: conflict ? 1 : 0 })
    return { kept: conflict ? 'conflict' : 'new', offset: row.offset, t_ms: row.t_ms }
  }

  return {
    /**
     * Keeps a reading once. The same key with another value is evidence, so it stays too.
     *
     * A time by receipt is our own stamp, to the millisecond: two messages in one millisecond are
     * not two claims about one instant. The later one moves on to the next free millisecond.
     *
     * @param offset  taken when the reading is new or a conflict
     */
    keep({ part, reading: r }: Arrival, offset: Offset): ReturnType<typeof keepRow> {
      const row: Row = {
        offset,
        part,
        probe: probes.number(r.probe),
        hour: hourOf(r.t_ms),
        t_ms: r.t_ms,
        seq: r.seq,
        received_ms: r.receivedAt_ms,
        celsius: r.celsius,
        quality: qualities.indexOf(r.quality),
        time_source: timeSources.indexOf(r.timeSource),
      }
      if (row.time_source === device) return keepRow(row)
      for (let i = 0; i < sameMillisecond; i++) {
        const taken = first.get(row)
        if (taken === undefined || taken.celsius === row.celsius) break
        row.t_ms += 1
        row.hour = hourOf(row.t_ms)
      }
      return keepRow(row)
    },
    /** The highest offset there is; 0 in an empty store. */
    lastOffset: (): Offset => last.get() ?? 0,
    rolledBack: probes.rolledBack,
    committed: probes.committed,
  }
}

type Read = {
  offset: number
  part: number
  name: string
  t_ms: number
  seq: number
  received_ms: number
  celsius: number | null
  quality: number
  time_source: number
  conflict: number
}

const readingOf = (row: Read): LoggedReading => ({
  offset: row.offset,
  part: row.part,
  // It passed the site file's schema before it was stored.
  probe: row.name as ProbeId,
  t_ms: row.t_ms,
  receivedAt_ms: row.received_ms,
  celsius: row.celsius,
  seq: row.seq,
  quality: qualities[row.quality] ?? 'bad',
  timeSource: timeSources[row.time_source] ?? 'device',
  kept: row.conflict === 1 ? 'conflict' : 'new',
})

/** A choice of readings; null stands for no bound. `until_ms` is not included. */
export type Choice = {
  readonly probe: string | null
  readonly from_ms: number | null
  readonly until_ms: number | null
}

/** The questions that are asked of the log and of the history. */
export const readingsQueries = (db: Db) => {
  const fields = 'offset, part, name, t_ms, seq, received_ms, celsius, quality, time_source'
  const both = (where: string) => `
    SELECT ${fields}, 0 AS conflict FROM reading JOIN probe ON probe.id = reading.probe WHERE ${where}
    UNION ALL
    SELECT ${fields}, conflict FROM further_reading JOIN probe ON probe.id = further_reading.probe WHERE ${where}
    ORDER BY offset LIMIT @limit`
  const ofPart = db.prepare<{ part: Part; after: Offset; limit: number }, Read>(
    both('part = @part AND offset > @after'),
  )
  const ofAll = db.prepare<{ after: Offset; limit: number }, Read>(both('offset > @after'))
  const chosen = db.prepare<Choice & { after: Offset; limit: number }, Read>(
    both(`offset > @after AND (@probe IS NULL OR name = @probe)
      AND (@from_ms IS NULL OR t_ms >= @from_ms) AND (@until_ms IS NULL OR t_ms < @until_ms)`),
  )
  const hours = db.prepare<[], { from: number | null; until: number | null }>(
    'SELECT min(hour) AS "from", max(hour) AS "until" FROM reading',
  )
  // CROSS JOIN keeps the order: one look into the index for each hour, none for other probes.
  const spanned = db.prepare<
    { probe: number; from_ms: number; until_ms: number; fromHour: number; untilHour: number },
    [number, number | null, number]
  >(`
    WITH RECURSIVE hours (h) AS (
      VALUES (@fromHour) UNION ALL SELECT h + 1 FROM hours WHERE h < @untilHour)
    SELECT t_ms, celsius, quality FROM hours CROSS JOIN reading
      ON hour = h AND probe = @probe
    WHERE t_ms >= @from_ms AND t_ms < @until_ms`)
  const numbers = namesTable(db, 'probe')

  return {
    /** Readings of a partition after an offset, in order of arrival. */
    read: (part: Part, after: Offset, limit: number): readonly LoggedReading[] =>
      ofPart.all({ part, after, limit }).map(readingOf),
    /** The same over all partitions: one pass for a process that owns them all. */
    readAll: (after: Offset, limit: number): readonly LoggedReading[] =>
      ofAll.all({ after, limit }).map(readingOf),
    /** A page of chosen readings in order of arrival, conflicts among them. */
    page: (choice: Choice, after: Offset, limit: number): readonly LoggedReading[] =>
      chosen.all({ ...choice, after, limit }).map(readingOf),
    /**
     * First readings of a probe within [from, until), in order of time: [t_ms, celsius, quality].
     * Null bounds take all there is.
     */
    *span(
      probe: string,
      from_ms: number | null,
      until_ms: number | null,
    ): Generator<readonly [number, number | null, Quality]> {
      const id = numbers.find(probe)
      const kept = hours.get()
      if (id === null || kept === undefined || kept.from === null || kept.until === null) return
      const from = Math.max(from_ms ?? -Infinity, kept.from * hour_ms)
      const until = Math.min(until_ms ?? Infinity, (kept.until + 1) * hour_ms)
      if (!(from < until)) return
      const rows = spanned.raw().all({
        probe: id,
        from_ms: from,
        until_ms: until,
        fromHour: hourOf(from),
        untilHour: hourOf(until),
      })
      for (const [t_ms, celsius, quality] of rows)
        yield [t_ms, celsius, qualities[quality] ?? 'bad']
    },
  }
}
