import type { Fan, ItemCurves } from '../config/schema/api.js'
import type { SiteFile } from '../config/schema/site.js'
import type { Judged } from './board.js'
import type { LoggedReading, Offset, Part } from './seam.js'

/**
 * What passes between the main thread and the watch thread. Both sides import this and nothing of
 * each other.
 */

export type WatchStart = {
  readonly site: SiteFile
  /** Folder of the store: the watch reads what it missed from disk, by a connection of its own. */
  readonly data: string
}

export type ToWatch =
  /** Readings just committed. `after` is the offset that was sent last: a hole is read from disk. */
  | {
      readonly kind: 'readings'
      readonly after: Offset
      readonly readings: readonly LoggedReading[]
    }
  /** There is more on disk, up to here: the queue was full. */
  | { readonly kind: 'more'; readonly upTo: Offset }
  /** The site's clock has moved: timers due by now fire, and verdicts are made anew. */
  | { readonly kind: 'tick'; readonly now_ms: number }
  | {
      readonly kind: 'ask'
      readonly id: number
      readonly what: 'outlook' | 'curves'
      readonly item: string
      readonly now_ms: number
    }

/** A change of verdict as the trail keeps it. */
export type Announced = {
  readonly part: Part
  readonly item: string
  readonly t_ms: number
  /** JSON of the Judgement. */
  readonly judgement: string
  readonly standing: string
}

export type EstimateRow = {
  readonly item: string
  readonly t_ms: number
  readonly temperature_C: number
  readonly u_K: number
  readonly margin_K: number
}

export type Outlook = { readonly forecast: readonly Fan[]; readonly chance: readonly Fan[] }

export type FromWatch =
  | { readonly kind: 'ready'; readonly offset: Offset }
  | { readonly kind: 'done'; readonly offset: Offset; readonly behind_s: number }
  | { readonly kind: 'judged'; readonly items: readonly Judged[] }
  | { readonly kind: 'announced'; readonly rows: readonly Announced[] }
  | { readonly kind: 'estimates'; readonly rows: readonly EstimateRow[] }
  | {
      readonly kind: 'snapshot'
      readonly part: Part
      readonly offset: Offset
      readonly model: string
      readonly configRevision: string
      readonly state: string
    }
  | { readonly kind: 'parked'; readonly items: readonly string[]; readonly cause: string }
  | { readonly kind: 'answer'; readonly id: number; readonly value: Outlook | ItemCurves | null }
