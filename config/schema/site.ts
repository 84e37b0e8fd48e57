import { z } from 'zod'
import { celsius, finite, instant, must, notNegative, positive, range_C, u_K } from './must.js'
import { Container, ContainerId, Product, ProductId } from './product.js'

export const ItemId = z.string().min(1).brand<'ItemId'>()
export type ItemId = z.infer<typeof ItemId>
export const ProbeId = z.string().min(1).brand<'ProbeId'>()
export type ProbeId = z.infer<typeof ProbeId>
export const StorageUnitId = z.string().min(1).brand<'StorageUnitId'>()
export type StorageUnitId = z.infer<typeof StorageUnitId>

/**
 * A thing that may be given once (in force always) or as a history of effective-dated values.
 * Before the first `from`, the first value counts (interfaces.md §1).
 */
const orHistory = <T extends z.ZodType>(shape: T) =>
  z.union([
    shape,
    z.strictObject({
      /** Named beside the history, so that other parts of the file can point at it. */
      id: z.string().min(1).optional(),
      history: z
        .array(
          z.strictObject({
            from: instant,
            approvedBy: z.string().default(''),
            value: shape,
          }),
        )
        .min(1)
        .check(
          must(
            (rows) =>
              rows.every(
                (row, i) => i === 0 || Date.parse(row.from) > Date.parse(rows[i - 1]?.from ?? ''),
              ),
            'its `from` times do not rise',
            'order the history by `from`, each later than the one before',
          ),
        ),
    }),
  ])

export const StorageUnitKind = z.enum([
  'cold room',
  'refrigerator',
  'freezer',
  'bath',
  'tank jacket',
  'dewar',
  'transport',
])
export type StorageUnitKind = z.infer<typeof StorageUnitKind>

/** A cold room, freezer, refrigerator, bath, dewar or tank jacket. */
export const StorageUnit = z
  .strictObject({
    id: StorageUnitId,
    name: z.string().min(1).optional(),
    kind: StorageUnitKind,
    airVolume_m3: positive('an air volume', 'm³').optional(),
    /** Heat capacity of shelves and fixtures that follow the air. */
    fixtures_kJ_K: notNegative('a heat capacity', 'kJ/K').optional(),
    wall_UA_W_K: positive('the heat leak of the walls', 'W/K').optional(),
    ambient_C: celsius.optional(),
    /** How much more heat the cooling takes per kelvin of warmer air. */
    cooling_W_K: notNegative('the response of the cooling', 'W/K').optional(),
    /** The level it is meant to hold. */
    setPoint_C: celsius.optional(),
  })
  .meta({ title: 'Storage unit' })
export type StorageUnit = z.infer<typeof StorageUnit>

/** The thing at risk: one tank, or `count` identical containers of one lot at one place. */
export const Item = z
  .strictObject({
    id: ItemId,
    name: z.string().optional(),
    product: ProductId,
    container: ContainerId,
    count: z
      .int()
      .check(
        must((n) => n >= 1, 'an item holds at least one container', 'give a whole number from 1'),
      ),
    lot: z.string().default(''),
    storageUnit: StorageUnitId,
    position: z.string().default(''),
    placedAt: instant,
    removedAt: instant.nullable().default(null),
    initial_C: celsius.optional(),
    initial_u_K: u_K.optional(),
    previouslyFrozen: z.boolean().default(false),
    /** Later places; exposure follows the item. */
    moves: z
      .array(
        z.strictObject({
          at: instant,
          storageUnit: StorageUnitId,
          position: z.string().default(''),
        }),
      )
      .default([]),
    /** History up to `at` is inherited. */
    splitFrom: z.strictObject({ item: ItemId, at: instant }).optional(),
    /** Another item, `count` 1, that carries the probe for this one. */
    witness: ItemId.optional(),
  })
  .meta({ title: 'Stored item' })
export type Item = z.infer<typeof Item>

export const Placement = z.enum(['in-item', 'on-item-wall', 'in-witness', 'in-buffer', 'in-air'])
export type Placement = z.infer<typeof Placement>

const mqttTopic = z
  .string()
  .min(1)
  .max(256)
  .check(
    must(
      (t) => !/[\0]/.test(t) && t.split('/').length <= 10,
      'a topic has at most 10 levels',
      'shorten the topic filter',
    ),
  )

/** A JSON Pointer (RFC 6901): empty, or parts each led by `/`. */
const pointer = z
  .string()
  .check(
    must(
      (p) => p === '' || (p.startsWith('/') && !/~(?![01])/.test(p)),
      'this is not a JSON Pointer (RFC 6901)',
      'start it with "/", write "~1" for a slash and "~0" for a tilde within a name',
    ),
  )

const unitOfTemperature = z.enum(['Cel', 'K', 'degF'])

const onTopic = { topic: mqttTopic, broker: z.string().optional() }

/** Where a probe's readings come from, and how they are written there. */
export const Source = z.discriminatedUnion('payload', [
  z.strictObject({ ...onTopic, payload: z.literal('senml'), name: z.string().min(1).optional() }),
  z.strictObject({
    ...onTopic,
    payload: z.literal('json'),
    value: pointer.default('/value'),
    time: pointer.default('/time'),
    timeFormat: z.enum(['rfc3339', 'iso8601', 's', 'ms']).default('rfc3339'),
    unit: unitOfTemperature.default('Cel'),
    /** With wildcards in the topic: which part of it, or which literal, names the probe. */
    probe: z.string().optional(),
    serial: pointer.optional(),
    seq: pointer.optional(),
  }),
  z.strictObject({
    ...onTopic,
    payload: z.literal('number'),
    unit: unitOfTemperature.default('Cel'),
  }),
  z.strictObject({
    payload: z.literal('sparkplug'),
    broker: z.string().optional(),
    group: z.string().min(1),
    edge: z.string().min(1),
    device: z.string().min(1).optional(),
    metric: z.string().min(1),
  }),
])
export type Source = z.infer<typeof Source>

/** What is added to a reading to correct it, and until when that is vouched for. */
export const Calibration = z.strictObject({
  /** ADDED to a reading to correct it. */
  offset_K: finite.default(0),
  at: instant.optional(),
  due: instant.optional(),
  u_K: u_K.default(0.1),
})
export type Calibration = z.infer<typeof Calibration>

export const Probe = z
  .strictObject({
    id: ProbeId,
    serial: z.string().optional(),
    role: z.enum(['monitor', 'control']).default('monitor'),
    placement: Placement,
    /** Time to 90 % of a step. */
    T90_s: z
      .number()
      .check(
        must(
          (s) => s > 0,
          'a lag is never 0',
          'give the time to 90 % of a step; 1 for a bare thin probe',
        ),
      )
      .default(60),
    accuracy_K: notNegative('an accuracy', 'K').default(0.5),
    resolution_K: notNegative('a resolution', 'K').default(0.1),
    interval_s: positive('the time between readings', 'seconds').default(60),
    range_C: range_C.optional(),
    calibration: orHistory(Calibration).optional(),
    faultCodes_C: z.array(finite).default([]),
    source: Source.optional(),
  })
  .meta({ title: 'Probe', description: 'A sensor, where it sits, and its lag there.' })
export type Probe = z.infer<typeof Probe>

export const Assignment = z.strictObject({
  probe: ProbeId,
  to: z.union([z.strictObject({ item: ItemId }), z.strictObject({ storageUnit: StorageUnitId })]),
  from: instant,
  until: instant.nullable().default(null),
})
export type Assignment = z.infer<typeof Assignment>

export const Window = z.strictObject({
  storageUnit: StorageUnitId,
  kind: z.enum(['defrost', 'door', 'cleaning', 'probe check']),
  from: instant,
  until: instant,
})
export type Window = z.infer<typeof Window>

const probability = z
  .number()
  .check(
    must((v) => v > 0 && v < 1, 'a chance lies between 0 and 1', 'give a fraction, 0.05 for 5 %'),
  )

/** A named regulation's or label's exposure timer. Hoarline has none of its own. */
const ExposureRule = z.strictObject({
  products: z.array(ProductId).min(1),
  atOrBelow_C: celsius.optional(),
  atOrAbove_C: celsius.optional(),
  single_min: positive('an exposure time', 'minutes').nullable().default(null),
  cumulative_min: positive('an exposure time', 'minutes').nullable().default(null),
  source: z.string().min(1),
})

/** The site's own choices about how verdicts are called. */
export const Policy = z
  .strictObject({
    /** Poised when the chance over the horizon reaches this. */
    poisedChance: probability.default(0.05),
    poisedHorizon_h: positive('a horizon', 'hours').default(8),
    /** Which end of the interval is held against the limit; the high one is the careful one. */
    chanceQuantile: z.enum(['high', 'middle']).default('high'),
    /** P(below the line) from which an item is called Below, and under 1 − which it is Above. */
    belowConfidence: z
      .number()
      .check(
        must((v) => v > 0.5 && v < 1, 'a confidence lies between 0.5 and 1', 'give 0.95 for 95 %'),
      )
      .default(0.95),
    silentAfter_intervals: positive('a count of intervals', 'intervals of the probe').default(3),
    /** An estimate less certain than this standard uncertainty is of no use: Silent. */
    usefulU_K: positive('a standard uncertainty', 'K').default(1.5),
    /** Warn so long before an item reaches its line. */
    lead_min: positive('a lead time', 'minutes').default(30),
    exposure: z.array(ExposureRule).default([]),
  })
  .meta({ title: 'Policy' })
export type Policy = z.infer<typeof Policy>

/** A coupling learned at this site and accepted by a person, from a date on. */
export const Learned = z
  .strictObject({
    item: ItemId.optional(),
    position: z.string().optional(),
    UA_W_K: positive('a heat-transfer coupling', 'W/K'),
    relU: notNegative('a relative uncertainty', 'parts of 1').default(0.15),
    from: instant,
    source: z.string().default(''),
  })
  .check(
    must(
      (l) => l.item !== undefined || l.position !== undefined,
      'it names neither an item nor a position',
      'give `item` or `position`',
    ),
  )
export type Learned = z.infer<typeof Learned>

const zone = z.string().check(
  must(
    (name) => {
      try {
        new Intl.DateTimeFormat('en', { timeZone: name })
        return true
      } catch {
        return false
      }
    },
    'this is not a time zone of the IANA list',
    'give one such as "Europe/Lisbon" or "UTC"',
  ),
)

/** The whole of a site: what is stored, in what, where, and what watches it. */
export const SiteFile = z
  .strictObject({
    format: z.literal('hoarline-site/1'),
    site: z.strictObject({
      id: z.string().min(1),
      name: z.string().min(1),
      zone: zone.default('UTC'),
    }),
    products: z.array(orHistory(Product)).default([]),
    containers: z.array(orHistory(Container)).default([]),
    storageUnits: z.array(orHistory(StorageUnit)).default([]),
    items: z.array(Item).default([]),
    probes: z.array(Probe).default([]),
    assignments: z.array(Assignment).default([]),
    windows: z.array(Window).default([]),
    policy: orHistory(Policy).prefault({}),
    learned: z.array(Learned).default([]),
    configRevision: z.int().min(0).default(1),
  })
  .meta({ title: 'Site file', description: 'hoarline-site/1' })
export type SiteFile = z.infer<typeof SiteFile>
