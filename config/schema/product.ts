import { z } from 'zod'
import {
  celsius,
  finite,
  fraction_kg_kg,
  must,
  notNegative,
  positive,
  range_C,
  u_K,
} from './must.js'

export const ProductId = z.string().min(1).brand<'ProductId'>()
export type ProductId = z.infer<typeof ProductId>

const uncertainty = {
  /** Standard uncertainty of the freezing point, K. */
  u_K: u_K.optional(),
  /** Standard uncertainty of the osmolality (or of the depression), relative. */
  relU: notNegative('a relative uncertainty', 'parts of 1').optional(),
}

const notAboveMelting = must<number>(
  (v) => v <= 0.01 && v >= -60,
  'a freezing point of something watery lies between −60 and 0 °C',
  'give °C below zero as a negative number',
)

/** Water of a product: with hardly any, nothing in it freezes and every figure is noise. */
const water_kg_kg = fraction_kg_kg.check(
  must(
    (v) => v >= 0.001,
    'with so little water nothing freezes',
    'give kg of water per kg of product, 0.001 or more',
  ),
)

const MeasuredFreezing = z
  .strictObject({
    kind: z.literal('measured'),
    freezingPoint_C: celsius.check(notAboveMelting),
    water_kg_kg,
    bound_kg_kg: fraction_kg_kg.default(0),
    ...uncertainty,
  })
  .meta({ title: 'Measured freezing point' })

const OsmolalityFreezing = z
  .strictObject({
    kind: z.literal('osmolality'),
    osmolality_osmol_kg: z
      .number()
      .check(
        must(
          (v) => v >= 0 && v <= 25,
          'an osmolality lies between 0 and 25 osmol/kg',
          'give osmol per kg of water (a value in mOsm/kg divided by 1000)',
        ),
      ),
    water_kg_kg,
    bound_kg_kg: fraction_kg_kg.default(0),
    ...uncertainty,
  })
  .meta({ title: 'Osmolality' })

const Solute = z.strictObject({
  /** Written out ("sodium chloride") or a formula that the solute table knows as an alias. */
  name: z.string().min(1),
  /** kg of solute per kg of product. */
  kg_kg: fraction_kg_kg,
})

const SolutionFreezing = z
  .strictObject({
    kind: z.literal('solution'),
    solutes: z
      .array(Solute)
      .min(1)
      .check(
        must(
          (s) => s.reduce((sum, x) => sum + x.kg_kg, 0) < 1,
          'the solutes leave no water',
          'give kg of each solute per kg of product; the rest is water',
        ),
      ),
    ...uncertainty,
  })
  .meta({ title: 'Solution of named solutes' })

const FoodFreezing = z
  .strictObject({
    kind: z.literal('food'),
    water_kg_kg,
    protein_kg_kg: fraction_kg_kg.default(0),
    fat_kg_kg: fraction_kg_kg.default(0),
    carbohydrate_kg_kg: fraction_kg_kg.default(0),
    fibre_kg_kg: fraction_kg_kg.default(0),
    ash_kg_kg: fraction_kg_kg.default(0),
    /** Default 0.4 × protein (ASHRAE Refrigeration, thermal properties of foods). */
    bound_kg_kg: fraction_kg_kg.optional(),
    freezingPoint_C: celsius.check(notAboveMelting),
    ...uncertainty,
  })
  .check(
    must(
      (f) =>
        f.water_kg_kg +
          f.protein_kg_kg +
          f.fat_kg_kg +
          f.carbohydrate_kg_kg +
          f.fibre_kg_kg +
          f.ash_kg_kg <=
        1.02,
      'the parts of the food add up to more than 1',
      'give kg of each part per kg of food',
    ),
  )
  .meta({ title: 'Food by composition' })

const WaterFreezing = z
  .strictObject({ kind: z.literal('water'), ...uncertainty })
  .meta({ title: 'Water' })

/** How a product freezes: one of five forms of the same knowledge. */
export const Freezing = z.discriminatedUnion('kind', [
  MeasuredFreezing,
  OsmolalityFreezing,
  SolutionFreezing,
  FoodFreezing,
  WaterFreezing,
])
export type Freezing = z.infer<typeof Freezing>

/** The end of freeze concentration. A bare `stop_C` is a glass. */
export const Stop = z.strictObject({ T_C: celsius, kind: z.enum(['eutectic', 'glass']) })
export type Stop = z.infer<typeof Stop>

/** What the physics needs of a product: how it freezes and what else is in it. */
export const ProductPhysics = z.strictObject({
  freezing: Freezing,
  /** Apparent heat capacity of all that is not water; negative for salts. Default by form. */
  liquidOther_cp_kJ_kgK: finite
    .check(
      must(
        (v) => v >= -20 && v <= 20,
        'an apparent heat capacity lies between −20 and 20 kJ/(kg K)',
        'give kJ per kg and kelvin; salts have about −2.7, sugars 1.4',
      ),
    )
    .optional(),
  stop_C: celsius.optional(),
  stop: Stop.optional(),
})
export type ProductPhysics = z.infer<typeof ProductPhysics>

export const Harm = z.enum([
  'freezing',
  'thawing',
  'both',
  'neither',
  'meant-supercooled',
  'meant-part-frozen',
])
export type Harm = z.infer<typeof Harm>

/** Which literature prior of the nucleation rate a product starts from (config/library/priors.json). */
export const NucleationClass = z.enum([
  'clean-solution',
  'suspension',
  'food-liquid',
  'dairy',
  'animal-tissue',
  'tap-water',
  'plant-tissue',
  'unknown',
])
export type NucleationClass = z.infer<typeof NucleationClass>

export const Product = z
  .strictObject({
    id: ProductId,
    name: z.string().min(1),
    revision: z.int().min(0).default(1),
    /** Where its numbers come from, for QA. */
    source: z.string().default(''),
    approvedBy: z.string().default(''),
    ...ProductPhysics.shape,
    harm: Harm.default('freezing'),
    label_C: range_C.optional(),
    limits: z
      .strictObject({ alert_C: range_C.optional(), action_C: range_C.optional() })
      .optional(),
    nucleation: NucleationClass.default('unknown'),
    cautions: z.array(z.string()).default([]),
  })
  .meta({ title: 'Product', description: 'How its contents freeze, and which way harm lies.' })
export type Product = z.infer<typeof Product>

/** What holds one portion of a product, and how it exchanges heat. */
export const ContainerId = z.string().min(1).brand<'ContainerId'>()
export type ContainerId = z.infer<typeof ContainerId>

const length = (what: string) => positive(what, 'metres')

/** What the thermal estimate needs of a container. */
export const ContainerPhysics = z.strictObject({
  fill_kg: positive('a fill', 'kg of product in one container'),
  shape: z.enum(['cylinder', 'sphere', 'slab', 'box']).optional(),
  radius_m: length('a radius').optional(),
  height_m: length('a height').optional(),
  thickness_m: length('a thickness').optional(),
  length_m: length('a length').optional(),
  width_m: length('a width').optional(),
  /** Heat capacity of the container wall taking part. */
  wall_kJ_K: notNegative('the heat capacity of a wall', 'kJ/K').default(0),
  UA_W_K: positive('a heat-transfer coupling', 'W/K').optional(),
  UA_relU: notNegative('a relative uncertainty', 'parts of 1').default(0.3),
  /** The area then comes from the shape. */
  h_W_m2K: positive('a heat-transfer coefficient', 'W/(m² K)').optional(),
  sealed: z.boolean().default(true),
})
export type ContainerPhysics = z.infer<typeof ContainerPhysics>

export const Container = z
  .strictObject({ id: ContainerId, name: z.string().optional(), ...ContainerPhysics.shape })
  .meta({
    title: 'Container',
    description: 'Fill, shape, wall and heat transfer of one container.',
  })
export type Container = z.infer<typeof Container>
