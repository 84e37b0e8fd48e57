import type { Harm } from './product.js'
import type { Placement, ProbeId, StorageUnitId } from './site.js'
import type { Evidence, Interval, Phase, Standing, Verdict } from './verdict.js'

/** What the HTTP interface and the live feed carry. Times are UTC ms here: they feed charts. */

/** A point of a track or a forecast: [t_ms, low, middle, high] of the margin, K. */
export type Fan = readonly [t_ms: number, low: number, middle: number, high: number]

export type ItemView = {
  readonly id: string
  readonly productName: string
  readonly productId: string
  readonly containerName: string
  readonly fill_kg: number
  readonly count: number
  readonly lot: string
  readonly storageUnit: string
  readonly position: string
  readonly harm: Harm
  readonly label_C: readonly [number, number] | null
  readonly verdict: Verdict
  /** Data time since which the standing has been this. */
  readonly since_ms: number
  /**
   * When a turn was announced that no person has withdrawn; null when there was none. While it
   * stands, a screen shows Turned even where later readings took it back (rulings.md 1).
   */
  readonly announcedTurned_ms: number | null
  /** The last hour of data time, thinned: [t_ms, margin_K]. */
  readonly track: readonly (readonly [number, number])[]
  /** The next half hour, margin. */
  readonly forecast: readonly Fan[]
  /**
   * Hours until the chance of turning reaches the site's limit and the item is Poised, as forecast:
   * low, middle, high. Null when it is not Below, or does not reach it within the horizon.
   */
  readonly poisedIn_h?: Interval | null
  /** Margins (K, negative) at which the chance of turning within 1 h at the policy quantile is 1, 10, 50 %; null above any. */
  readonly tints_K: readonly [number | null, number | null, number | null]
}

export type StorageUnitView = {
  readonly id: StorageUnitId
  readonly name: string
  readonly kind: string
  /** Latest trusted air reading, or null. */
  readonly air_C: number | null
  readonly airAt_ms: number | null
  readonly windows: readonly {
    readonly kind: string
    readonly from_ms: number
    readonly until_ms: number
  }[]
}

export type ProbeView = {
  readonly id: ProbeId
  readonly placement: Placement
  readonly interval_s: number
  /** Item or storage unit it is assigned to now. */
  readonly at: string | null
  readonly heard_ms: number | null
  readonly trusted_ms: number | null
  readonly reading_C: number | null
  readonly quality: string | null
  readonly silent: boolean
  readonly calibrationDue_ms: number | null
  readonly topic: string | null
}

/** Counts since the store began. Nothing is silently dropped: each kind is counted and shown. */
export type Intake = {
  readonly readings: number
  readonly duplicates: number
  readonly conflicts: number
  readonly refused: number
  readonly bad: number
  /** Disk or broker away, in words; null when all is well. */
  readonly outage: string | null
  /** How far the watch is behind the log, s. */
  readonly behind_s: number
  /** Stored items that the watch could not evaluate, by a fault of ours; normally empty. */
  readonly notEvaluated: readonly string[]
}

export type RefusedView = {
  readonly receivedAt_ms: number
  readonly topic: string
  readonly payload: string
  readonly code: string
  readonly field: string
  readonly value: string
  readonly problem: string
  readonly remedy: string
}

export type SiteView = {
  readonly id: string
  readonly name: string
  readonly zone: string
  /** The clock that judges, UTC ms, at the moment of the answer. */
  readonly now_ms: number
  /** Site milliseconds per wall millisecond: 1 on a real site. */
  readonly speed: number
  /** True on the demo site: every page then bears the practice frame. */
  readonly practice: boolean
  /** A probe that the simulator leaves alone, to try with mosquitto_pub. */
  readonly tryProbe: {
    readonly topic: string
    readonly name: string
    readonly mqtt: string
    readonly item: string
  } | null
  readonly policy: {
    readonly poisedChance: number
    readonly poisedHorizon_h: number
    readonly chanceQuantile: string
    readonly lead_min: number
  }
  readonly model: string
}

/** GET /api/v1/items, and the start of the live feed. */
export type Snapshot = {
  readonly seq: number
  /** Data time of the newest figure. */
  readonly asOf_ms: number
  readonly site: SiteView
  readonly storageUnits: readonly StorageUnitView[]
  readonly items: readonly ItemView[]
  readonly probes: readonly ProbeView[]
  readonly intake: Intake
}

/** Live feed event `changed`: what is newer than the last batch. A gap in `seq` means: refetch. */
export type Changed = {
  readonly seq: number
  readonly asOf_ms: number
  readonly now_ms: number
  readonly speed: number
  readonly items: readonly ItemView[]
  readonly storageUnits: readonly StorageUnitView[]
  readonly probes: readonly ProbeView[]
  readonly intake: Intake
}

/** GET /api/v1/items/{id}/readings?from&until&points */
export type ItemReadings = {
  readonly from_ms: number
  readonly until_ms: number
  readonly probes: readonly {
    readonly probe: string
    readonly placement: Placement
    readonly interval_s: number
    readonly offset_K: number
    /** [t_ms, celsius as sent | null, quality] */
    readonly points: readonly (readonly [number, number | null, string])[]
  }[]
  /** The estimate as it was reckoned then: [t_ms, temperature_C, u_K]. */
  readonly estimate: readonly (readonly [number, number, number])[]
  /** Forecast of temperature, leave as it is: [t_ms, low, middle, high]. */
  readonly forecast: readonly Fan[]
  /** Cumulative chance that at least one turns from now on, as forecast: [t_ms, low, middle, high]. */
  readonly chance: readonly Fan[]
}

/** GET /api/v1/items/{id}/verdicts: the changes of standing, phase or evidence, newest first. */
export type ItemTrail = readonly {
  readonly t_ms: number
  readonly standing: Standing
  readonly phase: Phase
  readonly evidence: Evidence
  readonly margin_K: number | null
  readonly why: readonly string[]
}[]

/** GET /api/v1/items/{id}/what-if: the two curves, the jump, and what the estimate rests on. */
export type ItemCurves = {
  readonly freezingPoint_C: number
  /** [h kJ/kg, T °C], h = 0 at the freezing point of the liquid. */
  readonly liquid: readonly (readonly [number, number])[]
  readonly equilibrium: readonly (readonly [number, number])[]
  readonly jump: {
    readonly h_kJ_kg: number
    readonly from_C: number
    readonly end_C: number
  } | null
  /** Where 90 % of the ice that can form has formed. */
  readonly solid90: { readonly h_kJ_kg: number; readonly T_C: number } | null
  readonly stop_C: number | null
  /** Parts of the standard uncertainty of the margin. */
  readonly budget: readonly { readonly key: string; readonly u_K: number }[]
}

/** GET /api/v1/cautions: the table, so that a screen can show the row of a key. */
export type CautionRow = {
  readonly key: string
  readonly title: string
  readonly do: readonly string[]
  readonly doNot: readonly string[]
  readonly closing: string
  readonly source: string
}

/** RFC 9457 problem details, with what a person can act on. */
export type Problem = {
  readonly type: string
  readonly title: string
  readonly status: number
  readonly detail: string
  readonly field?: string
  readonly value?: unknown
  readonly remedy?: string
}
