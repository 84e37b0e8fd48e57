import type { Evidence, Phase, Standing } from '../../config/schema/verdict.js'
import type { Gauss } from './gauss.js'
import { type Group, type Plan, valueAt } from './plan.js'

/** One explanation of an item: still liquid, turned, or turned and melted again. */
export type Branch = {
  readonly kind: 'liquid' | 'ice' | 'melted'
  /** Log of its weight; all weights of a bank sum to 1. */
  readonly w: number
  readonly g: Gauss
  /** Between which instants it turned; 0 for liquid. */
  readonly from_ms: number
  readonly to_ms: number
  /** Temperature it turned from, and how far the jump went. */
  readonly from_C: number
  readonly jump_K: number
  /** True when it was placed as ice. */
  readonly placedAsIce: boolean
}

/** What is remembered of one probe at one item. */
export type SlotTrack = {
  /** Last reading that was believed, and its corrected value; −1 and null for none. */
  readonly trusted_ms: number
  readonly trusted_C: number | null
  /** Last reading that was put to use or to the test. */
  readonly t_ms: number
  readonly raw_C: number | null
  readonly before_C: number | null
  /** Scale of recent innovations; 1 = as expected. */
  readonly scale: number
  /** Spread of the probe from one reading to the next, K². */
  readonly noise_K2: number
  readonly count: number
  /** Run of the very same value. */
  readonly same: number
  readonly sameFrom_ms: number
  /** Chance, in logs, that a working probe would have repeated itself so often. */
  readonly sameLog: number
  /** Since when it has not been reading its item, and why; −1 while it does. */
  readonly apart_ms: number
  readonly apartWhy: 'none' | 'left' | 'stuck' | 'fahrenheit'
  readonly level_C: number
  /** Where it stood when it was set aside, and how many gentle steps it has made since. */
  readonly aside_C: number
  readonly gentle: number
  readonly back: number
}

/** The other story about an outlying reading: the probe no longer reads the item. */
export type Fork = {
  readonly slot: number
  readonly since_ms: number
  /** Log of its odds against the story in which the probe reads the item. */
  readonly odds: number
  readonly bank: readonly Branch[]
  /** A turn was called over it: it is kept only for the day the probe shows the call was wrong. */
  readonly shelved: boolean
  readonly level_C: number
  /** What the slot last had believed before. */
  readonly trusted_ms: number
  readonly trusted_C: number | null
}

/** A turn that was called, as the readings tell it. */
export type Called = {
  readonly at_ms: number
  readonly reckoned: boolean
  readonly placedAsIce: boolean
}

export type ItemTrack = {
  /** How far it has been carried; −1 before it was placed. */
  readonly t_ms: number
  readonly unit: number
  /** Which of the matters of the item its enthalpies refer to. */
  readonly matter: number
  /** Air that last served, °C, 0 where none did; and the mark of its running integral. */
  readonly base_C: number
  readonly based: boolean
  readonly mark_Ks: number
  readonly bank: readonly Branch[]
  readonly fork: Fork | null
  readonly slots: readonly SlotTrack[]
  readonly called: Called | null
  /** Trusted readings in a row on which ice was probable. */
  readonly strong: number
  readonly strong_ms: number
  /** Exposure while liquid, for each exponent of the nucleation grid. */
  readonly exposure: readonly number[]
  /** Chance of having stayed liquid through that exposure. */
  readonly alive: number
  /** Running mean of its surroundings, °C, for forecasts. */
  readonly env_C: number
  readonly env_ms: number
  /** Surroundings as the inside of the body has felt them, °C. */
  readonly felt_C: number
  /** Poised by the chance when it was last reckoned on the track, and when that was. */
  readonly poised: boolean
  readonly poised_ms: number
  readonly phase: Phase
  /** Ice of the estimate at instants of the last half hour or so, for freezing against thawing. */
  readonly ice: readonly (readonly [t_ms: number, ice_kg_kg: number])[]
}

/** One probe of the air, or in a buffer, with its lag undone. */
export type AirTrack = {
  readonly probe: number
  readonly t_ms: number
  readonly air_C: number
  readonly sensor_C: number
  /** Covariance: air, air–sensor, sensor. */
  readonly P: readonly [number, number, number]
  readonly trusted_ms: number
  readonly trusted_C: number
  readonly raw_C: number
  readonly before_C: number | null
  readonly same: number
  readonly sameFrom_ms: number
  readonly sameLog: number
  readonly noise_K2: number
  readonly stuck: boolean
}

export type UnitTrack = {
  readonly t_ms: number
  readonly source: 'air' | 'buffer' | 'neighbour' | 'none'
  readonly air_C: number
  readonly u_K: number
  /** Its running mean over the last quarter of an hour or so, °C: compressors cycle. */
  readonly mean_C: number
  /** Running integral of the air temperature, K s, up to t_ms. */
  readonly integral_Ks: number
  readonly probes: readonly AirTrack[]
  /** Item that informs its neighbours, and when it last did; −1 for none. */
  readonly neighbour: number
  readonly neighbour_ms: number
}

/** All that the sorted readings up to a place tell. Tracks are replaced, never changed. */
export type Core = {
  readonly items: readonly ItemTrack[]
  readonly units: readonly UnitTrack[]
}

/** A reading's place in the order in which readings count. */
export type Place = readonly [t_ms: number, seq: number, probe: number]

/** What was heard under one key: one value, or several that contradict each other. */
export type Heard = {
  readonly place: Place
  /** Every distinct value that came. */
  readonly values_C: readonly (number | null)[]
  /** The best mark under which it came: true when it may bear on an estimate. */
  readonly believed: boolean
  readonly late: boolean
}

export type Checkpoint = { readonly before: Place; readonly core: Core }

/** What was last announced of an item: a story of its own, in order of the clock. */
export type Announced = {
  readonly standing: Standing | null
  readonly phase: Phase | null
  readonly evidence: Evidence | null
  readonly hasBeenFrozen: boolean
}

/**
 * What the watch remembers of a group: plain data, the same after JSON and back. The readings of the
 * last hours and the core they lead to, with checkpoints to start again from when one comes late.
 */
export type GroupState = {
  readonly group: string
  readonly clock_ms: number
  readonly core: Core
  /** Sorted by place; older ones are forgotten. */
  readonly heard: readonly Heard[]
  /** Place of the newest reading in the core. */
  readonly upTo: Place
  readonly checkpoints: readonly Checkpoint[]
  /** Readings at or before this instant are no longer here: a late one needs the log. */
  readonly forgotten_ms: number
  /** A reading came that is older than what is remembered: replay from the log. */
  readonly needsReplayFrom_ms: number | null
  readonly announced: readonly Announced[]
  /** When each item was last looked at for a change. */
  readonly looked_ms: readonly number[]
}

export const beforeAll: Place = [-1e15, -2, -1]

export const emptySlot: SlotTrack = {
  trusted_ms: -1,
  trusted_C: null,
  t_ms: -1,
  raw_C: null,
  before_C: null,
  scale: 1,
  noise_K2: 0,
  count: 0,
  same: 0,
  sameFrom_ms: 0,
  sameLog: 0,
  apart_ms: -1,
  apartWhy: 'none',
  level_C: 0,
  aside_C: 0,
  gentle: 0,
  back: 0,
}

/** A group before any reading. */
export function freshState(plan: Plan, group: Group): GroupState {
  const core: Core = {
    items: group.items.map((index) => {
      const item = plan.items[index]!
      return {
        t_ms: -1,
        unit: valueAt(item.places, item.placed_ms),
        matter: 0,
        base_C: 0,
        based: false,
        mark_Ks: 0,
        bank: [],
        fork: null,
        slots: item.slots.map(() => emptySlot),
        called: null,
        strong: 0,
        strong_ms: -1,
        exposure: [],
        alive: 1,
        env_C: 0,
        env_ms: -1,
        felt_C: 0,
        poised: false,
        poised_ms: -1,
        phase: 'unknown' as const,
        ice: [],
      }
    }),
    units: group.units.map(() => ({
      t_ms: -1,
      source: 'none' as const,
      air_C: 0,
      u_K: 0,
      mean_C: 0,
      integral_Ks: 0,
      probes: [],
      neighbour: -1,
      neighbour_ms: -1,
    })),
  }
  return {
    group: group.id,
    clock_ms: -1,
    core,
    heard: [],
    upTo: beforeAll,
    checkpoints: [{ before: beforeAll, core }],
    forgotten_ms: -1e15,
    needsReplayFrom_ms: null,
    announced: group.items.map(() => ({
      standing: null,
      phase: null,
      evidence: null,
      hasBeenFrozen: false,
    })),
    looked_ms: group.items.map(() => -1),
  }
}
