import { existsSync, mkdirSync } from 'node:fs'
import { join } from 'node:path'
import Database from 'better-sqlite3'
import { Refusal } from '../../config/schema/refusal.js'
import { migrations } from './migrations.js'

export type Db = Database.Database

/** The file of the store inside the data folder. */
export const storeFile = (data: string): string => join(data, 'hoarline.sqlite')

/** A reader waits so long for a lock before it gives up, ms. In WAL mode it hardly ever waits. */
const busy_ms = 2000

/** WAL pages (4 KiB) after which a commit also checkpoints: 8 MiB of WAL, a few ms of work. */
const checkpoint_pages = 2000

/**
 * A store's shape brought up to date, each step in one transaction with its number.
 *
 * @throws Refusal 'newer-store' when a later program wrote it
 */
export const migrate = (db: Db, steps: readonly string[] = migrations): void => {
  const version = (): number => db.pragma('user_version', { simple: true }) as number
  if (version() > steps.length)
    throw new Refusal(
      'newer-store',
      'data',
      db.name,
      `a later version of Hoarline wrote this store (${version()}, known here: ${steps.length})`,
      'run that version, or restore a backup made by this one',
    )
  // IMMEDIATE: two programs that start at once take turns, and the second finds it done.
  const step = db.transaction((): boolean => {
    const from = version()
    const sql = steps[from]
    if (sql === undefined) return false
    db.exec(sql)
    db.pragma(`user_version = ${from + 1}`)
    return true
  })
  while (step.immediate());
}

/**
 * The one write connection. Committed means on the platter: WAL with synchronous=FULL syncs the
 * log on each commit (protocols.md §3).
 *
 * @throws Refusal when the folder cannot be used, or the file is not a store
 */
export const openForWriting = (data: string): Db => {
  try {
    mkdirSync(data, { recursive: true })
    const db = new Database(storeFile(data), { timeout: busy_ms })
    db.pragma('journal_mode = WAL')
    db.pragma('synchronous = FULL')
    db.pragma('foreign_keys = ON')
    db.pragma(`wal_autocheckpoint = ${checkpoint_pages}`)
    migrate(db)
    return db
  } catch (error) {
    if (error instanceof Refusal) throw error
    throw new Refusal(
      'unusable-folder',
      'data',
      data,
      `the store cannot be opened there (${error instanceof Error ? error.message : error})`,
      'give a folder on a local disk that this user may write, with --data or HOARLINE_DATA',
      { cause: error },
    )
  }
}

/**
 * A connection that only reads; it works with and without a running server.
 *
 * @throws Refusal 'no-store' where there is none
 */
export const openForReading = (data: string): Db => {
  if (!existsSync(storeFile(data)))
    throw new Refusal(
      'no-store',
      'data',
      data,
      'there is no store in this folder',
      'give the folder that the server was started with (--data or HOARLINE_DATA)',
    )
  try {
    const db = new Database(storeFile(data), { readonly: true, timeout: busy_ms })
    db.pragma('query_only = ON')
    const version = db.pragma('user_version', { simple: true }) as number
    if (version !== migrations.length)
      throw new Refusal(
        'other-store',
        'data',
        data,
        `the store has shape ${version}, this program reads ${migrations.length}`,
        'start the server of this version on it once',
      )
    return db
  } catch (error) {
    if (error instanceof Refusal) throw error
    throw new Refusal(
      'unusable-folder',
      'data',
      data,
      `the store cannot be read (${error instanceof Error ? error.message : error})`,
      'check that this user may read and write the folder: reading needs the -shm file beside it',
      { cause: error },
    )
  }
}

/**
 * Holds a data folder for this process, so that two servers never write one store. The lock is a
 * transaction on a file of its own: the system drops it with the process, kill -9 included.
 *
 * @returns releases the folder
 * @throws  Refusal 'in-use'
 */
export const holdFolder = (data: string): (() => void) => {
  mkdirSync(data, { recursive: true })
  const db = new Database(join(data, 'in-use.sqlite'), { timeout: 0 })
  try {
    db.exec('BEGIN EXCLUSIVE')
  } catch (error) {
    db.close()
    throw new Refusal(
      'in-use',
      'data',
      data,
      'another Hoarline is running on this folder',
      'stop it, or give another folder with --data or HOARLINE_DATA',
      { cause: error },
    )
  }
  return () => db.close()
}
