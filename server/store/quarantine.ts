import { createHash } from 'node:crypto'
import type { Refused } from '../seam.js'
import type { Db } from './database.js'

type Row = Omit<Refused, 'payload' | 'receivedAt_ms' | 'notice'> & {
  received_ms: number
  raw_payload: number
  notice: number
}

/** What could not be used as it came, with its bytes. The caller owns the transaction. */
export const quarantineTable = (db: Db) => {
  const find = db
    .prepare<[Uint8Array], number>('SELECT id FROM raw_payload WHERE sha256 = ?')
    .pluck()
  const keepBytes = db.prepare<[Uint8Array, Uint8Array]>(
    'INSERT INTO raw_payload (sha256, bytes) VALUES (?, ?)',
  )
  const insert = db.prepare<Row>(`
    INSERT INTO refused (received_ms, topic, raw_payload, code, field, value, problem, remedy, notice)
    VALUES (@received_ms, @topic, @raw_payload, @code, @field, @value, @problem, @remedy, @notice)`)
  return {
    keep(r: Refused): void {
      const sha256 = createHash('sha256').update(r.payload).digest()
      const raw_payload =
        find.get(sha256) ?? Number(keepBytes.run(sha256, Buffer.from(r.payload)).lastInsertRowid)
      insert.run({
        received_ms: r.receivedAt_ms,
        topic: r.topic,
        raw_payload,
        code: r.code,
        field: r.field,
        value: r.value,
        problem: r.problem,
        remedy: r.remedy,
        notice: r.notice === true ? 1 : 0,
      })
    },
  }
}

type Read = Omit<Refused, 'notice'> & { notice: number }

export const quarantineQueries = (db: Db) => {
  const newest = db.prepare<[number], Read>(`
    SELECT received_ms AS receivedAt_ms, topic, bytes AS payload, code, field, value, problem, remedy, notice
    FROM refused JOIN raw_payload ON raw_payload.id = refused.raw_payload
    ORDER BY refused.id DESC LIMIT ?`)
  return {
    /** The newest refusals, newest first, with the raw bytes. */
    newest: (limit: number): readonly Refused[] =>
      newest
        .all(limit)
        .map(({ notice, ...r }) => (notice === 1 ? { ...r, notice: true as const } : r)),
  }
}
