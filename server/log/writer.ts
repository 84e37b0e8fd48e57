import { parentPort, workerData } from 'node:worker_threads'
import { Refusal } from '../../config/schema/refusal.js'
import type { Arrival } from '../seam.js'
import { counterOfCode, countersTable } from '../store/counters.js'
import { openForWriting } from '../store/database.js'
import { historyTable } from '../store/history.js'
import { metaTable } from '../store/meta.js'
import { quarantineTable } from '../store/quarantine.js'
import { readingsTable } from '../store/readings.js'
import { statesTable } from '../store/states.js'
import {
  type Answer,
  type Batch,
  type Extra,
  fateWidth,
  nothingElse,
  type Order,
  type Outcomes,
  setFate,
  unpack,
  type WriterData,
} from './wire.js'

type Call = { readonly arrivals: readonly Arrival[]; readonly extra: Extra }
type Tally = (name: string, n: number) => void

/**
 * The writer thread: the only write connection to the store. A batch is one transaction; its
 * answer is sent after the commit returned, which with synchronous=FULL is after the disk has it.
 */

/** The WAL is emptied this often while nothing is being written. */
const tidy_ms = 60_000

const { data, fault } = workerData as WriterData
const port = parentPort
if (port === null) throw new Error('the writer runs in a thread of its own')
const answer = (message: Answer): void => port.postMessage(message)

/** A fault that a test asked for looks like SQLite's own. */
const faultPoint = (): void => {
  if (fault === null || fault[0] === 0) return
  const left = Atomics.sub(fault, 1, 1)
  if (fault[0] === 1 && left !== 0) return
  if (fault[0] === 1) Atomics.store(fault, 0, 0)
  throw Object.assign(new Error('database or disk is full'), { code: 'SQLITE_FULL' })
}

const codeOf = (error: unknown): string =>
  error instanceof Error && 'code' in error ? String(error.code) : ''

/**
 * A constraint or a type error is ours, whatever the disk does. All else that SQLite reports (full, I/O
 * error, read-only, locked, corrupt) means that the disk cannot be trusted to keep a reading now.
 */
const isOurs = (error: unknown): boolean =>
  !/^SQLITE_(?!CONSTRAINT|MISMATCH|RANGE|MISUSE|ERROR|TOOBIG)/.test(codeOf(error))

const open = () => {
  const db = openForWriting(data)
  const readings = readingsTable(db)
  const quarantine = quarantineTable(db)
  const counters = countersTable(db)
  const states = statesTable(db)
  const history = historyTable(db)
  const meta = metaTable(db)
  let offset = readings.lastOffset()

  const keepReading = (arrival: Arrival, tally: Tally) => {
    faultPoint()
    const fate = readings.keep(arrival, offset + 1)
    tally(fate.kept === 'duplicate' ? 'duplicates' : 'readings', 1)
    if (fate.kept === 'duplicate') return fate
    offset += 1
    if (fate.kept === 'conflict') tally('conflicts', 1)
    if (arrival.reading.quality === 'bad') tally('bad', 1)
    return fate
  }

  const keepExtra = ({ refused, change }: Extra, tally: Tally) => {
    for (const r of refused) {
      faultPoint()
      quarantine.keep(r)
      tally(r.notice === true ? 'notices' : 'refused', 1)
      tally(counterOfCode(r.code), 1)
    }
    if (change === null) return
    faultPoint()
    for (const snapshot of change.snapshots ?? []) states.save(snapshot)
    for (const judgement of change.trail ?? []) history.appendChange(judgement)
    for (const estimate of change.estimates ?? []) history.appendEstimate(estimate)
    for (const [key, value] of Object.entries(change.meta ?? {})) meta.set(key, value)
  }

  const keepAll = (calls: readonly Call[]): ReturnType<typeof readings.keep>[] => {
    const counted = new Map<string, number>()
    const tally: Tally = (name, n) => void counted.set(name, (counted.get(name) ?? 0) + n)
    const before = offset
    db.exec('BEGIN IMMEDIATE')
    try {
      const fates = calls.flatMap(({ arrivals, extra }) => {
        const kept = arrivals.map((arrival) => keepReading(arrival, tally))
        keepExtra(extra, tally)
        return kept
      })
      for (const [name, n] of counted) counters.add(name, n)
      faultPoint()
      db.exec('COMMIT')
      readings.committed()
      history.committed()
      return fates
    } catch (error) {
      offset = before
      readings.rolledBack()
      history.rolledBack()
      if (db.inTransaction) db.exec('ROLLBACK')
      throw error
    }
  }

  const callsOf = ({ columns, sizes, extras }: Batch): Call[] => {
    const all = unpack(columns)
    let at = 0
    return sizes.map((size, i) => {
      at += size
      return { arrivals: all.slice(at - size, at), extra: extras.get(i) ?? nothingElse }
    })
  }

  const keepBatch = (batch: Batch): Outcomes => {
    const calls = callsOf(batch)
    const fates = new Float64Array(batch.columns.probes.length * fateWidth)
    const faults = new Map<number, string>()
    try {
      keepAll(calls).forEach((fate, i) => void setFate(fates, i, fate))
    } catch (error) {
      if (!isOurs(error)) throw error
      // One faulty call must not take the others with it: each on its own, then.
      let at = 0
      calls.forEach((call, i) => {
        try {
          keepAll([call]).forEach((fate, k) => void setFate(fates, at + k, fate))
        } catch (fault) {
          if (!isOurs(fault)) throw fault
          faults.set(i, String(fault instanceof Error ? fault.stack : fault))
        }
        at += call.arrivals.length
      })
    }
    return { fates, faults }
  }

  return { db, keepBatch, counts: counters.counts }
}

const start = () => {
  const { db, keepBatch, counts } = open()
  let dirty = false
  let last: { attempt: number; message: string } | null = null
  const tidy = setInterval(() => {
    const busy = dirty
    dirty = false
    if (busy) return
    try {
      db.pragma('wal_checkpoint(TRUNCATE)')
    } catch {
      // A full disk or a long reader: the WAL stays as it is, and nothing in it is lost.
    }
  }, tidy_ms)
  tidy.unref()

  port.on('message', (order: Order) => {
    if (order.kind === 'close') {
      clearInterval(tidy)
      db.close()
      answer({ kind: 'closed' })
      port.close()
      return
    }
    dirty = true
    const { id, attempt } = order.batch
    if (last !== null && attempt <= last.attempt)
      return answer({ kind: 'outage', id, message: last.message })
    try {
      answer({ kind: 'done', id, outcomes: keepBatch(order.batch), counts: counts() })
    } catch (error) {
      last = { attempt, message: error instanceof Error ? error.message : `${error}` }
      answer({ kind: 'outage', id, message: last.message })
    }
  })
  answer({ kind: 'ready', counts: counts() })
}

try {
  start()
} catch (error) {
  const refusal = error instanceof Refusal ? error : null
  answer({
    kind: 'failed',
    refusal:
      refusal === null
        ? null
        : [refusal.code, refusal.field, String(refusal.value), refusal.problem, refusal.remedy],
    message: error instanceof Error ? (error.stack ?? error.message) : `${error}`,
  })
}
