import type { ProbeId } from '../../config/schema/site.js'
import type { Judgement } from '../../config/schema/verdict.js'
import type { Arrival, Kept, LoggedReading, Refused } from '../seam.js'
import type { Counts } from '../store/counters.js'
import type { Estimate } from '../store/history.js'
import { qualities, timeSources } from '../store/readings.js'
import type { Snapshot } from '../store/states.js'

/**
 * What crosses between the main thread and the writer thread. Readings go as columns in one buffer
 * that changes hands: cloned as objects, they would cost more than their insert.
 */

/** Numbers of a reading on the wire: part, t, receipt, celsius, seq, quality, time source. */
const width = 7

export type Columns = {
  readonly probes: readonly string[]
  readonly numbers: Float64Array<ArrayBuffer>
}

export const pack = (arrivals: readonly Arrival[]): Columns => {
  const numbers = new Float64Array(arrivals.length * width)
  arrivals.forEach(({ part, reading: r }, i) => {
    // NaN stands for null here and only here; a stored celsius is finite or null.
    const celsius = r.celsius ?? Number.NaN
    numbers.set(
      [
        part,
        r.t_ms,
        r.receivedAt_ms,
        celsius,
        r.seq,
        qualities.indexOf(r.quality),
        timeSources.indexOf(r.timeSource),
      ],
      i * width,
    )
  })
  return { probes: arrivals.map((a) => a.reading.probe), numbers }
}

export const unpack = ({ probes, numbers }: Columns): Arrival[] =>
  probes.map((probe, i) => {
    const at = (k: number): number => numbers[i * width + k] ?? Number.NaN
    const celsius = at(3)
    return {
      part: at(0),
      reading: {
        probe: probe as ProbeId, // it was one before it was packed
        t_ms: at(1),
        receivedAt_ms: at(2),
        celsius: Number.isNaN(celsius) ? null : celsius,
        seq: at(4),
        quality: qualities[at(5)] ?? 'bad',
        timeSource: timeSources[at(6)] ?? 'device',
      },
    }
  })

const kinds: readonly Kept[] = ['new', 'duplicate', 'conflict']

/** What became of each reading: kind, offset, t (a receipt stamp may have moved on a little). */
export type Fates = Float64Array
export const fateWidth = 3

export const setFate = (
  fates: Fates,
  i: number,
  fate: { kept: Kept; offset: number; t_ms: number },
): void => fates.set([kinds.indexOf(fate.kept), fate.offset, fate.t_ms], i * fateWidth)

/** The readings of a call as they were kept; its fates begin at reading `from` of the batch. */
export const logged = (arrivals: readonly Arrival[], fates: Fates, from: number): LoggedReading[] =>
  arrivals.map(({ part, reading }, i) => {
    const at = (from + i) * fateWidth
    return {
      ...reading,
      part,
      kept: kinds[fates[at] ?? 0] ?? 'new',
      offset: fates[at + 1] ?? 0,
      t_ms: fates[at + 2] ?? reading.t_ms,
    }
  })

/** What the watch found, saved in one transaction. Every part may be left out. */
export type Change = {
  readonly snapshots?: readonly Snapshot[]
  readonly trail?: readonly Judgement[]
  readonly estimates?: readonly Estimate[]
  readonly meta?: Readonly<Record<string, string>>
}

/** What a call brings besides readings. */
export type Extra = { readonly refused: readonly Refused[]; readonly change: Change | null }
export const nothingElse: Extra = { refused: [], change: null }

/**
 * One batch is one commit. The readings of all its calls stand in one set of columns; `sizes` says
 * how many belong to each call, so that a faulty call can be told apart.
 */
export type Batch = {
  readonly id: number
  readonly columns: Columns
  readonly sizes: readonly number[]
  /**
   * Rises with every batch that came back. One that was sent before an earlier one came back is not
   * tried, so that the order of the log is that of the calls, whatever fails.
   */
  readonly attempt: number
  /** By call; most calls bring readings alone. */
  readonly extras: ReadonlyMap<number, Extra>
}

/** Fates of all readings of a batch, and why nothing of a call was kept, by call. */
export type Outcomes = { readonly fates: Fates; readonly faults: ReadonlyMap<number, string> }

export type Answer =
  | { readonly kind: 'ready'; readonly counts: Counts }
  | {
      readonly kind: 'done'
      readonly id: number
      readonly outcomes: Outcomes
      readonly counts: Counts
    }
  /** Nothing of the batch was kept: the disk takes no more. */
  | { readonly kind: 'outage'; readonly id: number; readonly message: string }
  | { readonly kind: 'closed' }
  | {
      readonly kind: 'failed'
      readonly refusal: readonly [string, string, string, string, string] | null
      readonly message: string
    }

export type Order = { readonly kind: 'batch'; readonly batch: Batch } | { readonly kind: 'close' }

/**
 * For tests alone; no setting reaches it. Two numbers that tests share with the writer: the mode
 * (0 nothing fails, 1 the write after `n` more fails once, 2 every write fails), and `n`.
 */
export type Fault = Int32Array
export type WriterData = { readonly data: string; readonly fault: Fault | null }
