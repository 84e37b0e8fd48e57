import { z } from 'zod'
import { finite, fraction_kg_kg, must, notNegative, positive } from './must.js'
import { NucleationClass } from './product.js'

/** Tables that the program ships as data: config/library/*.json. */

const text = z.string().min(1)

/** A name is asked for in lower case without subscripts, so it is kept so. */
const plainName = text.regex(/^[a-z0-9() ]+$/)

const SoluteRow = z.strictObject({
  name: plainName,
  aliases: z.array(plainName),
  molarMass_kg_mol: positive('a molar mass', 'kg/mol'),
  k: positive('the osmolality of one mole', 'osmol/mol'),
  beta: finite,
  gamma: finite,
  delta: finite,
  fittedTo_kg_kg: fraction_kg_kg,
  maxError_K: notNegative('an error', 'K'),
  errorBelow2K_K: notNegative('an error', 'K'),
  otherCp_kJ_kgK: finite,
  source: text,
  cpSource: text,
})

/** config/library/solutes.json */
export const SoluteFile = z.strictObject({
  revision: z.int().min(1),
  about: text,
  sources: z.record(text, text),
  solutes: z.array(SoluteRow).min(1),
})

const rising = z
  .tuple([finite, finite])
  .check(must(([low, high]) => low < high, 'it does not rise', 'give [low, high]'))

/** config/library/priors.json */
export const PriorsFile = z.strictObject({
  revision: z.int().min(1),
  about: text,
  nu: positive('the shape of a gamma', 'no unit'),
  nuSource: text,
  volumeExponent: z.strictObject({
    above_m3: positive('a volume', 'm³'),
    range: rising,
    source: text,
  }),
  previouslyFrozen: z.strictObject({ decades: finite, source: text }),
  classes: z.record(
    NucleationClass,
    z.strictObject({
      log10Kappa: z.strictObject({
        mean: finite,
        sd: positive('a spread', 'decades'),
      }),
      b: rising,
      source: text,
    }),
  ),
})
