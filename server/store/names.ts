import type { Db } from './database.js'

/** Numbers for the names of probes and items: a row then costs a few bytes and not a name. */
export const namesTable = (db: Db, table: 'probe' | 'item') => {
  const insert = db.prepare<[string]>(`INSERT INTO ${table} (name) VALUES (?)`)
  const find = db.prepare<[string], number>(`SELECT id FROM ${table} WHERE name = ?`).pluck()
  const known = new Map<string, number>()
  let mark: string[] = []

  return {
    /** The number of a name, made on its first use. The caller owns the transaction. */
    number(name: string): number {
      const known_ = known.get(name) ?? find.get(name)
      const id = known_ ?? Number(insert.run(name).lastInsertRowid)
      if (known_ === undefined) mark.push(name)
      known.set(name, id)
      return id
    },
    /** The number of a name, or null when it was never used. */
    find: (name: string): number | null => find.get(name) ?? null,
    /** After a rollback the names that were made in it are not known any more. */
    rolledBack(): void {
      for (const name of mark) known.delete(name)
      mark = []
    },
    committed(): void {
      mark = []
    },
  }
}
