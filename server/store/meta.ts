import type { Db } from './database.js'

/** Single facts by name: the demo's clock, the client id for outside brokers. */
export const metaTable = (db: Db) => {
  const set = db.prepare<[string, string]>(
    'INSERT INTO meta (key, value) VALUES (?, ?) ON CONFLICT (key) DO UPDATE SET value = excluded.value',
  )
  return { set: (key: string, value: string): void => void set.run(key, value) }
}

export const metaQueries = (db: Db) => {
  const get = db.prepare<[string], string>('SELECT value FROM meta WHERE key = ?').pluck()
  return { meta: (key: string): string | null => get.get(key) ?? null }
}
