import { Worker } from 'node:worker_threads'
import type { ItemCurves } from '../config/schema/api.js'
import { threadFile } from './log/threadFile.js'
import type { LoggedReading, Offset } from './seam.js'
import type { FromWatch, Outlook, ToWatch, WatchStart } from './watching.js'

/** Readings that may be on their way to the watch; past it, it reads them from disk itself. */
const mostUnderWay = 20_000

/** So many readings, or what came within so long, go to the watch in one message. */
const together = { readings: 200, wait_ms: 10 } as const

export type Watcher = {
  /** Readings that are on disk now. */
  hear(readings: readonly LoggedReading[]): void
  tick(now_ms: number): void
  outlook(item: string, now_ms: number): Promise<Outlook | null>
  curves(item: string, now_ms: number): Promise<ItemCurves | null>
  /** Ends the thread after it has saved its states. */
  stop(): Promise<void>
}

/**
 * The main thread's end of the watch thread.
 *
 * @param on  what is done with each message of it; called in order
 * @returns   once it has judged everything on disk
 */
export const startWatch = async (
  start: WatchStart,
  on: (message: FromWatch) => void,
): Promise<Watcher> => {
  const worker = new Worker(threadFile('worker', import.meta.url), { workerData: start })
  let sent: Offset = 0
  let newest: Offset = 0
  let done: Offset = 0
  let asked = 0
  const answers = new Map<number, (value: Outlook | ItemCurves | null) => void>()
  const post = (message: ToWatch) => worker.postMessage(message)
  let waiting: LoggedReading[] = []
  let timer: NodeJS.Timeout | null = null
  /** The watch lags: what came since is not sent, the next tick says how far there is more on disk. */
  let hole = false
  /** A message between threads costs as much as a verdict, so readings travel together. */
  const flush = () => {
    if (timer !== null) clearTimeout(timer)
    timer = null
    if (waiting.length > 0) post({ kind: 'readings', after: sent, readings: waiting })
    sent = waiting.reduce((most, r) => Math.max(most, r.offset), sent)
    waiting = []
  }

  await new Promise<void>((resolve, reject) => {
    worker.once('error', reject)
    worker.on('message', (message: FromWatch) => {
      if (message.kind === 'ready') {
        sent = message.offset
        newest = message.offset
        done = message.offset
        worker.off('error', reject)
        resolve()
      } else if (message.kind === 'done') done = message.offset
      else if (message.kind === 'answer') {
        answers.get(message.id)?.(message.value)
        answers.delete(message.id)
        return
      }
      on(message)
    })
  })

  const ask = (what: 'outlook' | 'curves', item: string, now_ms: number) =>
    new Promise<Outlook | ItemCurves | null>((resolve) => {
      asked += 1
      answers.set(asked, resolve)
      post({ kind: 'ask', id: asked, what, item, now_ms })
    })

  return {
    hear(readings) {
      const fresh = readings.filter((r) => r.kept !== 'duplicate')
      const last = fresh.reduce((most, r) => Math.max(most, r.offset), newest)
      if (fresh.length > 0 && last - done > mostUnderWay) hole = true
      if (fresh.length > 0 && !hole) {
        waiting.push(...fresh)
        if (waiting.length >= together.readings) flush()
        else timer ??= setTimeout(flush, together.wait_ms)
      }
      newest = last
    },
    tick(now_ms) {
      flush()
      post({ kind: 'tick', now_ms, upTo: newest })
      // It reads up to there from disk before it takes another message.
      if (newest - done <= mostUnderWay) {
        hole = false
        sent = newest
      }
    },
    // The kind of answer follows the kind of question.
    outlook: (item, now_ms) => ask('outlook', item, now_ms) as Promise<Outlook | null>,
    curves: (item, now_ms) => ask('curves', item, now_ms) as Promise<ItemCurves | null>,
    async stop() {
      flush()
      const ended = new Promise((resolve) => worker.once('exit', resolve))
      post({ kind: 'stop' })
      await ended
    },
  }
}
