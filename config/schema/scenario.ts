import { z } from 'zod'
import { celsius, finite, instant, must, notNegative, positive } from './must.js'
import { ItemId, ProbeId, StorageUnitId } from './site.js'

const seconds = notNegative('a time in a script', 'seconds after the start')
const minutes = positive('a duration', 'minutes')

/** When an act of a script happens: once, or again and again. */
const timing = {
  at_s: seconds,
  /** Repeats at this distance; each time may be shifted a little by the seed. */
  every_s: positive('a period', 'seconds').optional(),
  jitter_s: notNegative('a shift', 'seconds').default(0),
  /** No repeat after this. */
  until_s: seconds.optional(),
}

/** What a script does to the simulated site. */
export const Act = z.discriminatedUnion('act', [
  z.strictObject({
    ...timing,
    act: z.literal('set point'),
    storageUnit: StorageUnitId,
    to_C: celsius,
    minutes: minutes.optional(),
  }),
  z.strictObject({
    ...timing,
    act: z.literal('defrost'),
    storageUnit: StorageUnitId,
    minutes,
    peak_C: celsius,
  }),
  z.strictObject({ ...timing, act: z.literal('door'), storageUnit: StorageUnitId, minutes }),
  z.strictObject({
    ...timing,
    act: z.literal('nucleate'),
    item: ItemId,
    ifBelow_K: finite.default(0),
  }),
  z.strictObject({ ...timing, act: z.literal('probe silent'), probe: ProbeId, minutes }),
  z.strictObject({
    ...timing,
    act: z.literal('probe fault'),
    probe: ProbeId,
    minutes,
    code_C: finite,
  }),
])
export type Act = z.infer<typeof Act>

/** How ice nucleates in a class of products here: λ = V κ (ΔT/10)^b, with a spread per container. */
const Kinetics = z.strictObject({
  log10Kappa: finite,
  b: positive('an exponent', 'a number'),
  spread_decades: notNegative('a spread', 'decades').default(0.5),
})

/** How the air of a storage unit behaves, beside what the site file says of it. */
const Climate = z.strictObject({
  storageUnit: StorageUnitId,
  setPoint_C: celsius,
  /** Half of the controller's band. */
  band_K: positive('a band', 'K').default(0.8),
  /** Time constant of the air towards its surroundings with the cooling off. */
  leak_h: positive('a time', 'hours').default(3),
  /** How much colder than the set point the cooling alone would make it. */
  pull_K: positive('a difference', 'K').default(25),
})

export const Scenario = z
  .strictObject({
    id: z.string().min(1),
    title: z.string().min(1),
    objective: z.string().min(1),
    /** File of the site, beside the scenario's folder: "demo/site.json". */
    site: z.string().min(1),
    start: instant.default('2026-03-02T00:00:00Z'),
    hours: positive('a length', 'hours'),
    seed: z.int().default(1),
    climates: z.array(Climate),
    kinetics: z.record(z.string(), Kinetics).default({}),
    /** Products that never nucleate by chance here: the script decides. */
    acts: z.array(Act),
    /** A probe that is left alone, for a visitor with an MQTT client. */
    tryProbe: ProbeId.optional(),
    /** Probes that never speak. */
    mute: z.array(ProbeId).default([]),
  })
  .check(
    must(
      (s) => s.acts.every((a) => a.every_s === undefined || a.jitter_s < a.every_s),
      'an act is shifted by more than its period',
      'give a jitter_s below every_s',
    ),
  )
  .meta({ title: 'Scenario' })
export type Scenario = z.infer<typeof Scenario>
