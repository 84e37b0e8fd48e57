import type { Judgement } from '../../config/schema/verdict.js'
import type { Db } from './database.js'
import { namesTable } from './names.js'
import { hour_ms, hourOf } from './readings.js'
import { thin } from './thin.js'

/** The estimate of an item's product temperature, as it was reckoned at an instant. */
export type Estimate = {
  readonly item: string
  readonly t_ms: number
  readonly temperature_C: number
  readonly u_K: number
  readonly margin_K: number
}

/** Verdict changes and thinned estimates. The caller owns the transaction. */
export const historyTable = (db: Db) => {
  const items = namesTable(db, 'item')
  // A replay after a crash reckons the same again: the row that was written first stands.
  const change = db.prepare(`
    INSERT INTO verdict_change (item, t_ms, standing, phase, evidence, has_been_frozen, judgement)
    VALUES (@item, @t_ms, @standing, @phase, @evidence, @has_been_frozen, @judgement)
    ON CONFLICT DO NOTHING`)
  const estimate = db.prepare(`
    INSERT INTO estimate (hour, item, t_ms, temperature_C, u_K, margin_K)
    VALUES (@hour, @item, @t_ms, @temperature_C, @u_K, @margin_K) ON CONFLICT DO NOTHING`)
  return {
    appendChange: (j: Judgement): void =>
      void change.run({
        item: items.number(j.item),
        t_ms: j.t_ms,
        standing: j.standing,
        phase: j.phase,
        evidence: j.evidence,
        has_been_frozen: j.hasBeenFrozen ? 1 : 0,
        judgement: JSON.stringify(j),
      }),
    appendEstimate: (e: Estimate): void =>
      void estimate.run({ ...e, item: items.number(e.item), hour: hourOf(e.t_ms) }),
    rolledBack: items.rolledBack,
    committed: items.committed,
  }
}

export const historyQueries = (db: Db) => {
  const items = namesTable(db, 'item')
  const trail = db
    .prepare<[number, number], string>(
      'SELECT judgement FROM verdict_change WHERE item = ? ORDER BY t_ms DESC, id DESC LIMIT ?',
    )
    .pluck()
  const hours = db.prepare<[], { from: number | null; until: number | null }>(
    'SELECT min(hour) AS "from", max(hour) AS "until" FROM estimate',
  )
  const span = db
    .prepare<
      { item: number; from_ms: number; until_ms: number; fromHour: number; untilHour: number },
      [number, number, number, number]
    >(`
    WITH RECURSIVE hours (h) AS (
      VALUES (@fromHour) UNION ALL SELECT h + 1 FROM hours WHERE h < @untilHour)
    SELECT t_ms, temperature_C, u_K, margin_K FROM hours CROSS JOIN estimate
      ON hour = h AND item = @item
    WHERE t_ms >= @from_ms AND t_ms < @until_ms`)
    .raw()
  return {
    /** The changes of an item's verdict, newest first. */
    trail(item: string, limit: number): readonly Judgement[] {
      const id = items.find(item)
      // Cast: what was stored was a Judgement of this or an earlier model.
      return id === null ? [] : trail.all(id, limit).map((text) => JSON.parse(text) as Judgement)
    },
    /**
     * Estimates of an item within [from, until), thinned so that no extreme is lost:
     * [t_ms, temperature_C, u_K, margin_K].
     *
     * @param points  about the most that are returned, from 4
     */
    estimates(
      item: string,
      from_ms: number | null,
      until_ms: number | null,
      points: number,
    ): readonly (readonly [number, number, number, number])[] {
      const id = items.find(item)
      const kept = hours.get()
      if (id === null || kept === undefined || kept.from === null || kept.until === null) return []
      const from = Math.max(from_ms ?? -Infinity, kept.from * hour_ms)
      const until = Math.min(until_ms ?? Infinity, (kept.until + 1) * hour_ms)
      if (!(from < until)) return []
      const rows = span.all({
        item: id,
        from_ms: from,
        until_ms: until,
        fromHour: hourOf(from),
        untilHour: hourOf(until),
      })
      return thin(rows, points)
    },
  }
}
