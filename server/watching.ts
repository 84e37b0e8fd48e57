import type { Fan, ItemCurves } from '../config/schema/api.js'
import type { SiteFile } from '../config/schema/site.js'
import type { Judgement } from '../config/schema/verdict.js'
import type { Judged } from './board.js'
import type { LoggedReading, Offset } from './seam.js'
import type { Estimate } from './store/history.js'
import type { Snapshot } from './store/states.js'

/**
 * What passes between the main thread and the watch thread. Both sides import this and nothing of
 * each other.
 */

export type WatchStart = {
  readonly site: SiteFile
  /** Folder of the store: the watch reads what it missed from disk, by a connection of its own. */
  readonly data: string
  /** The site's clock at the start, UTC ms. */
  readonly now_ms: number
}

export type ToWatch =
  /** Readings just committed. `after` is the offset sent last: a hole between is read from disk. */
  | {
      readonly kind: 'readings'
      readonly after: Offset
      readonly readings: readonly LoggedReading[]
    }
  /** The site's clock has moved: timers due by now fire, and verdicts are made anew. */
  | { readonly kind: 'tick'; readonly now_ms: number; readonly upTo: Offset }
  /** Save what there is and end. */
  | { readonly kind: 'stop' }
  | {
      readonly kind: 'ask'
      readonly id: number
      readonly what: 'outlook' | 'curves'
      readonly item: string
      readonly now_ms: number
    }

export type Outlook = { readonly forecast: readonly Fan[]; readonly chance: readonly Fan[] }

export type FromWatch =
  /** Everything on disk is judged, up to here. */
  | { readonly kind: 'ready'; readonly offset: Offset }
  /** All readings up to here are judged. */
  | { readonly kind: 'done'; readonly offset: Offset }
  | { readonly kind: 'judged'; readonly items: readonly Judged[] }
  /** To be saved: verdict changes, thinned estimates, states with the offset they stand for. */
  | {
      readonly kind: 'save'
      readonly trail: readonly Judgement[]
      readonly estimates: readonly Estimate[]
      readonly snapshots: readonly Snapshot[]
    }
  /** These items could not be evaluated, by a fault of ours. */
  | { readonly kind: 'parked'; readonly items: readonly string[]; readonly cause: string }
  | { readonly kind: 'answer'; readonly id: number; readonly value: Outlook | ItemCurves | null }
