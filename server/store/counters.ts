import type { Db } from './database.js'

/** Counts since the store began; what was refused is also counted by its code. */
export type Counts = {
  readonly readings: number
  readonly duplicates: number
  readonly conflicts: number
  readonly refused: number
  readonly notices: number
  readonly bad: number
  readonly refusedByCode: Readonly<Record<string, number>>
}

const byCode = 'code:'

export const countsOf = (rows: Iterable<readonly [string, number]>): Counts => {
  const all = new Map(rows)
  return {
    readings: all.get('readings') ?? 0,
    duplicates: all.get('duplicates') ?? 0,
    conflicts: all.get('conflicts') ?? 0,
    refused: all.get('refused') ?? 0,
    notices: all.get('notices') ?? 0,
    bad: all.get('bad') ?? 0,
    refusedByCode: Object.fromEntries(
      [...all]
        .filter(([name]) => name.startsWith(byCode))
        .map(([name, n]) => [name.slice(byCode.length), n]),
    ),
  }
}

export const counterOfCode = (code: string): string => `${byCode}${code}`

/** Counts that are committed with what they count, so that they agree after any crash. */
export const countersTable = (db: Db) => {
  const add = db.prepare<[string, number]>(
    'INSERT INTO counter (name, n) VALUES (?, ?) ON CONFLICT (name) DO UPDATE SET n = n + excluded.n',
  )
  const all = db.prepare<[], [string, number]>('SELECT name, n FROM counter').raw()
  return {
    /** The caller owns the transaction. */
    add: (name: string, n: number): void => void (n !== 0 && add.run(name, n)),
    counts: (): Counts => countsOf(all.all()),
  }
}
