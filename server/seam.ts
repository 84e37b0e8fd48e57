import type { Reading } from '../config/schema/reading.js'

/**
 * The five interfaces that a site larger than one machine replaces (protocols.md §6). One machine
 * needs them too: they are where the program is cut into rooms that do not know each other.
 */

/** One of 256 logical partitions; everything thermally coupled lies in one. */
export type Part = number
export const partCount = 256

/**
 * The partition of a storage unit: FNV-1a (Fowler, Noll, Vo 1991) over its id, modulo 256. Stable
 * for ever: stored offsets and snapshots carry it.
 */
export const partOf = (storageUnit: string): Part => {
  let hash = 0x811c9dc5
  for (const byte of new TextEncoder().encode(storageUnit)) {
    hash = Math.imul(hash ^ byte, 0x01000193) >>> 0
  }
  return hash % partCount
}

/** Where in the log something stands: rising, never reused. */
export type Offset = number

/** What became of a reading on its way into the log. Duplicates and conflicts are kept and counted. */
export type Kept = 'new' | 'duplicate' | 'conflict'

/** A payload, or part of one, that could not be used: kept with its bytes, counted and shown. */
export type Refused = {
  readonly receivedAt_ms: number
  readonly topic: string
  /** The raw bytes as they came. */
  readonly payload: Uint8Array
  readonly code: string
  readonly field: string
  /** The refused value as text, cut short. */
  readonly value: string
  readonly problem: string
  readonly remedy: string
  /** Set when the reading itself was kept and this only says what is amiss with it. */
  readonly notice?: true
}

export type LoggedReading = Reading & {
  readonly offset: Offset
  readonly part: Part
  readonly kept: Kept
}

/** What one MQTT message came to: readings, refusals, or both. */
export type Arrival = { readonly part: Part; readonly reading: Reading }

export interface IngestLog {
  /**
   * Keeps readings and refusals. Resolves ONLY when all of it is on disk; then the sender may be
   * answered (PUBACK).
   *
   * @returns what became of each reading, in the order given
   * @throws  Outage when the disk takes no more: nothing of this call is then acknowledged
   */
  append(
    arrivals: readonly Arrival[],
    refused: readonly Refused[],
  ): Promise<readonly LoggedReading[]>
  /** Readings of a partition after an offset, in order of arrival, at most `limit`. */
  read(part: Part, after: Offset, limit: number): readonly LoggedReading[]
}

export interface StateStore {
  /** The state last saved for a partition, with the offset it stands for; null when there is none. */
  load(part: Part): {
    readonly offset: Offset
    readonly model: string
    readonly configRevision: number
    readonly state: unknown
  } | null
  save(
    part: Part,
    offset: Offset,
    model: string,
    configRevision: number,
    state: unknown,
  ): Promise<void>
}

export interface Ownership {
  /** One owner steps a partition at a time. On one machine it is always this process. */
  own(part: Part): Promise<{ readonly epoch: number; readonly lost: AbortSignal }>
}

export interface FanOut {
  /** Tells every open screen that these items have news. */
  changed(items: readonly string[]): void
}

export interface Clock {
  /** The site's clock, UTC ms: the wall's on a real site, the demo's own on the demo site. */
  now_ms(): number
}

/** The disk or the broker is away: nothing is acknowledged, it is said on screen, and tried again. */
export class Outage extends Error {
  override readonly name = 'Outage'
  constructor(
    readonly part: 'disk' | 'broker',
    message: string,
    options?: ErrorOptions,
  ) {
    super(message, options)
  }
}
