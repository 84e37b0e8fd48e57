import { Worker } from 'node:worker_threads'
import {
  type Arrival,
  type IngestLog,
  type LoggedReading,
  Outage,
  type Refused,
  type StateStore,
} from '../seam.js'
import type { Counts } from '../store/counters.js'
import { holdFolder } from '../store/database.js'
import { openReader, type Reader } from '../store/reader.js'
import { started } from './started.js'
import { threadFile } from './threadFile.js'
import {
  type Answer,
  type Batch,
  type Change,
  type Extra,
  type Fault,
  logged,
  type Order,
  type Outcomes,
  pack,
} from './wire.js'

/** A commit holds so many readings at most, or what came within so long: one sync for all of it. */
const group = { readings: 500, wait_ms: 5 } as const

/** Batches under way to the writer: one that commits and one that waits, so that it never idles. */
const batchesInFlight = 2

/**
 * Readings that may wait for the disk. Past it a call is turned away at once with an Outage: the
 * sender keeps its message and sends it again, which costs less than our memory.
 */
const mostWaiting = 100_000

/** While the disk is away, the batch at the head is tried again this often. */
const retry_ms = 500

/**
 * A call waits so long for an absent disk before it is turned away. Shorter than the keepalive
 * that devices use (30–60 s), so that they learn of it by a closed connection and not by silence.
 */
const patience_ms = 10_000

type Job = {
  /** Rising: the order of the calls. */
  readonly n: number
  readonly arrivals: readonly Arrival[]
  readonly extra: Extra
  readonly size: number
  /** On the monotonic clock: after it the caller is told that the disk is away. */
  readonly due_ms: number
  settle(kept: readonly LoggedReading[]): void
  fail(error: Error): void
}

export type SqliteLog = IngestLog &
  StateStore & {
    /** Snapshots, trail, estimates and facts of the watch, in one transaction. */
    apply(change: Change): Promise<void>
    /** Counts since the store began, as of the last commit. */
    counts(): Counts
    /** Questions to the store, over the main thread's own connection. */
    readonly reader: Reader
    /** Null while all is well. */
    outage(): Outage | null
    /** Commits what waits, checkpoints, and lets the folder go. */
    close(): Promise<void>
  }

/**
 * The durable log on one machine: group commits by one writer thread.
 *
 * @param options.data      folder of the store
 * @param options.onOutage  called when the disk goes away, and with null when it is back
 * @param options.fault     tests only: lets writes fail
 * @param options.waits     tests only: shorter waits for an absent disk
 * @throws Refusal when the folder cannot be used or another server holds it
 */
export const openLog = async (options: {
  readonly data: string
  readonly onOutage: (outage: Outage | null) => void
  readonly fault?: Fault
  readonly waits?: { readonly retry_ms?: number; readonly patience_ms?: number }
}): Promise<SqliteLog> => {
  const letGo = holdFolder(options.data)
  const worker = new Worker(threadFile('writer', import.meta.url), {
    workerData: { data: options.data, fault: options.fault ?? null },
  })
  let counts: Counts
  try {
    counts = await started(worker)
  } catch (error) {
    letGo()
    throw error
  }
  const reader = openReader(options.data)
  const waits = { retry_ms, patience_ms, ...options.waits }

  const waiting: Job[] = []
  const flying = new Map<number, Job[]>()
  let waitingSize = 0
  let nextId = 1
  let nextJob = 1
  let attempt = 0
  let timer: NodeJS.Timeout | null = null
  let retry: NodeJS.Timeout | null = null
  let away: Outage | null = null
  let closed: Error | null = null
  let closing = false
  let whenIdle: (() => void) | null = null

  const say = (outage: Outage | null) => {
    const changed = (outage === null) !== (away === null)
    away = outage
    if (changed) options.onOutage(outage)
  }

  const send = (jobs: Job[]) => {
    const id = nextId++
    flying.set(id, jobs)
    const columns = pack(jobs.flatMap((j) => j.arrivals))
    const extras = new Map<number, Extra>()
    jobs.forEach((j, i) => {
      if (j.extra.refused.length > 0 || j.extra.change !== null) extras.set(i, j.extra)
    })
    const batch: Batch = { id, attempt, columns, sizes: jobs.map((j) => j.arrivals.length), extras }
    worker.postMessage({ kind: 'batch', batch } satisfies Order, [columns.numbers.buffer])
  }

  const takeBatch = (): Job[] => {
    const jobs: Job[] = []
    let size = 0
    for (const job of waiting) {
      if (jobs.length > 0 && size + job.size > group.readings) break
      jobs.push(job)
      size += job.size
    }
    waiting.splice(0, jobs.length)
    waitingSize -= size
    return jobs
  }

  const flush = () => {
    if (timer !== null) clearTimeout(timer)
    timer = null
    // An absent disk is asked with one batch at a time.
    const most = away === null ? batchesInFlight : 1
    while (waiting.length > 0 && flying.size < most && retry === null) send(takeBatch())
    if (waiting.length === 0 && flying.size === 0) whenIdle?.()
  }

  const soon = () => {
    if (flying.size >= batchesInFlight) return // the next answer flushes
    if (waitingSize >= group.readings) flush()
    else timer ??= setTimeout(flush, group.wait_ms)
  }

  const settle = (id: number, { fates, faults }: Outcomes) => {
    const jobs = flying.get(id) ?? []
    flying.delete(id)
    let at = 0
    jobs.forEach((job, i) => {
      const fault = faults.get(i)
      if (fault === undefined) job.settle(logged(job.arrivals, fates, at))
      else job.fail(new Error(`this could not be kept, by a fault of ours: ${fault}`))
      at += job.arrivals.length
    })
  }

  const putBack = (id: number, message: string) => {
    const jobs = flying.get(id) ?? []
    flying.delete(id)
    const outage = new Outage('disk', `the disk takes no more: ${message}`)
    say(outage)
    attempt += 1
    // Back in order, whichever batch comes back first: what came first is tried first.
    waiting.push(...jobs)
    waiting.sort((a, b) => a.n - b.n)
    waitingSize += jobs.reduce((sum, j) => sum + j.size, 0)
    retry ??= setTimeout(tryAgain, waits.retry_ms)
  }

  const turnAway = (gone: (job: Job) => boolean) => {
    const overdue = waiting.filter(gone)
    if (overdue.length === 0) return
    const rest = waiting.filter((job) => !gone(job))
    waiting.splice(0, waiting.length, ...rest)
    waitingSize = rest.reduce((sum, j) => sum + j.size, 0)
    for (const job of overdue) job.fail(away ?? new Outage('disk', 'the disk takes no more'))
  }

  const tryAgain = () => {
    retry = null
    const now_ms = performance.now()
    turnAway((job) => closing || job.due_ms <= now_ms)
    // Nobody waits any more, so an empty commit asks whether the disk is back.
    if (waiting.length === 0 && away !== null && !closing) enqueue(question())
    flush()
  }

  const enqueue = (job: Job) => {
    waiting.push(job)
    waitingSize += job.size
    soon()
  }

  const call = (arrivals: readonly Arrival[], extra: Extra): Promise<readonly LoggedReading[]> =>
    new Promise((resolve, reject) => {
      if (closed !== null || closing) return reject(closed ?? new Error('the log is closing'))
      const size = arrivals.length + extra.refused.length + 1
      if (waitingSize + size > mostWaiting)
        return reject(away ?? new Outage('disk', `${waitingSize} readings wait for the disk`))
      enqueue({
        n: nextJob++,
        arrivals,
        extra,
        size,
        due_ms: performance.now() + waits.patience_ms,
        settle: resolve,
        fail: reject,
      })
    })

  const die = (error: Outage) => {
    if (closed === null) say(error)
    closed ??= error
    for (const job of [...flying.values()].flat().concat(waiting.splice(0))) job.fail(error)
    flying.clear()
    waitingSize = 0
    whenIdle?.()
  }

  worker.on('message', (answer: Answer) => {
    if (answer.kind === 'done') {
      counts = answer.counts
      say(null)
      settle(answer.id, answer.outcomes)
      flush()
    } else if (answer.kind === 'outage') {
      putBack(answer.id, answer.message)
    }
  })
  worker.on('error', (error) => die(new Outage('disk', 'the writer has ended', { cause: error })))
  worker.on('exit', () => die(new Outage('disk', 'the writer has ended')))

  const apply = async (change: Change): Promise<void> =>
    void (await call([], { refused: [], change }))

  return {
    append: (arrivals, refused) => call(arrivals, { refused: refused.map(alone), change: null }),
    apply,
    save: (part, offset, model, configRevision, state) =>
      apply({ snapshots: [{ part, offset, model, configRevision, state }] }),
    read: reader.read,
    load: reader.load,
    reader,
    counts: () => counts,
    outage: () => away,
    async close() {
      if (closing) return
      closing = true
      if (closed === null) {
        await new Promise<void>((resolve) => {
          whenIdle = resolve
          flush()
        })
        closed = new Error('the log is closed')
        const ended = new Promise((resolve) => worker.once('exit', resolve))
        worker.postMessage({ kind: 'close' } satisfies Order)
        await ended
      }
      if (retry !== null) clearTimeout(retry)
      reader.close()
      letGo()
    },
  }
}

/** A payload is often a slice of a socket's buffer, all of which would cross to the writer. */
const alone = (refused: Refused): Refused => ({
  ...refused,
  payload: Uint8Array.from(refused.payload),
})

/** A write that nobody waits for, to learn whether the disk is back. */
const question = (): Job => ({
  n: 0,
  arrivals: [],
  extra: { refused: [], change: { meta: { 'disk asked': String(Date.now()) } } },
  size: 1,
  due_ms: Number.POSITIVE_INFINITY,
  settle: () => {},
  fail: () => {},
})
