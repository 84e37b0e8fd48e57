import { z } from 'zod'
import { instant } from './must.js'
import { ItemId, ProbeId } from './site.js'

export const Standing = z.enum(['Above', 'Near', 'Below', 'Poised', 'Turned', 'Silent'])
export type Standing = z.infer<typeof Standing>

export const Phase = z.enum(['liquid', 'supercooled', 'freezing', 'frozen', 'thawing', 'unknown'])
export type Phase = z.infer<typeof Phase>

/** What a claim about an item rests on, best first (rulings.md 5). */
export const Evidence = z.enum([
  'measured in item',
  'measured on item wall',
  'measured on witness',
  'inferred from neighbour',
  'inferred from air',
  'inferred from buffer',
  'not assessable',
])
export type Evidence = z.infer<typeof Evidence>

/** Low, middle, high: the 10, 50 and 90 % quantiles over all stated uncertainty. */
export const Interval = z.tuple([z.number(), z.number(), z.number()])
export type Interval = z.infer<typeof Interval>

export const Limit = z.enum(['inside', 'below', 'above', 'unknown'])
export type Limit = z.infer<typeof Limit>

/** Q1: did a reading leave its limits? From readings, never from the estimate. */
export const Limits = z.strictObject({
  reading_C: z.number().nullable(),
  probe: ProbeId.nullable(),
  label: Limit,
  alert: Limit,
  action: Limit,
})

/** Q3: has ice formed, how much, when. */
export const TurnedClaim = z.strictObject({
  /** Of the container that is watched, or of one typical container where none is. */
  probability: z.number(),
  /** At least one of the batch. */
  any: Interval,
  /** How many of the batch. */
  count: Interval,
  earliest: instant.nullable(),
  latest: instant.nullable(),
  /** The temperature it turned from. */
  from_C: z.number().nullable(),
  /** True when called from depth and time alone, no rise having been seen (rulings.md 3). */
  reckoned: z.boolean(),
})

/** Chance of turning within a horizon, given still liquid now; `low`…`high` are those of `any`. */
export const Chance = z.strictObject({
  horizon_h: z.number(),
  one: Interval,
  any: Interval,
  low: z.number(),
  middle: z.number(),
  high: z.number(),
  /** The same over the next hour, for the depth tints. */
  any_1h: Interval.optional(),
  basis: z.string(),
})

/** What happens if ice nucleates now, for ONE container, wall included. */
export const IfItFreezes = z.strictObject({
  end_C: z.number(),
  firstIce_kg_kg: z.number(),
  jump_K: z.number(),
  heatNow_kJ: z.number(),
  heatToSolid_kJ: z.number().nullable(),
  solid_h: Interval.nullable(),
  /** Ice that the air can make, where it cannot make it solid, and how long 95 % of that takes. */
  settlesAt_kg_kg: z.number().nullable(),
  settle_h: Interval.nullable(),
  airRise_K: Interval.nullable(),
  airRise_all_K: Interval.nullable(),
  neighbourRise_K: Interval.nullable(),
})

/** One item's verdict at one instant (interfaces.md §3, rulings.md 4–6). Q1 to Q5 stay apart. */
export const Verdict = z
  .strictObject({
    t: instant,
    item: ItemId,
    standing: Standing,
    phase: Phase,
    hasBeenFrozen: z.boolean(),
    evidence: Evidence,
    evidenceProbes: z.array(ProbeId),
    /** Estimate of the PRODUCT temperature and its standard uncertainty. */
    temperature_C: z.number().nullable(),
    u_K: z.number().nullable(),
    freezingPoint_C: z.number(),
    freezingPoint_u_K: z.number(),
    margin_K: z.number().nullable(),
    belowProbability: z.number().nullable(),
    turned: TurnedClaim,
    chance: Chance.nullable(),
    ifItFreezes: IfItFreezes.nullable(),
    /** Hours until it crosses its line at the present trend. */
    crossing: z.strictObject({ below_h: Interval.nullable(), above_h: Interval.nullable() }),
    limits: Limits,
    /** Frozen or supercooled stock that is meant to be so. */
    asIntended: z.boolean(),
    heldBy: z.string().nullable(),
    disposition: z.string().nullable(),
    /** Q4: Hoarline never says. */
    harmAssessed: z.null(),
    /** Keys of config/library/cautions.json, most urgent first. */
    cautions: z.array(z.string()),
    /** One plain sentence each. */
    why: z.array(z.string()),
    model: z.string(),
    configRevision: z.int(),
  })
  .meta({ title: 'Verdict' })
export type Verdict = z.infer<typeof Verdict>

/** A reason as the pure rooms give it: a key of config/words and its values. */
export type Why = {
  readonly key: string
  readonly values: Readonly<Record<string, string | number>>
}

/** A verdict before its reasons have become sentences; this form is stored. */
export type Judgement = Omit<Verdict, 'why' | 't'> & {
  readonly t_ms: number
  readonly why: readonly Why[]
}

/** Bumped with every change of a model's result. */
export const modelVersion = '0.1.0'
