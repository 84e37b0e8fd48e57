import type { Worker } from 'node:worker_threads'
import { Refusal } from '../../config/schema/refusal.js'
import type { Counts } from '../store/counters.js'
import type { Answer } from './wire.js'

/**
 * Resolves when the writer thread has opened the store, with the counts in it.
 *
 * @throws Refusal when the folder cannot be used
 */
export const started = (worker: Worker): Promise<Counts> =>
  new Promise((resolve, reject) => {
    worker.once('error', reject)
    worker.once('message', (answer: Answer) => {
      worker.off('error', reject)
      if (answer.kind === 'ready') return resolve(answer.counts)
      if (answer.kind === 'failed' && answer.refusal !== null)
        return reject(new Refusal(...answer.refusal))
      reject(new Error(answer.kind === 'failed' ? answer.message : `unexpected: ${answer.kind}`))
    })
  })
