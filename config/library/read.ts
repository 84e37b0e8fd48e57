import { existsSync, readFileSync } from 'node:fs'
import { dirname, join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { z } from 'zod'
import { CautionTable } from '../schema/caution.js'
import { fraction_kg_kg, notNegative, positive } from '../schema/must.js'
import { parse } from '../schema/parse.js'
import { NucleationClass } from '../schema/product.js'

const text = z.string().min(1)

/** A name is asked for in lower case without subscripts, so it is kept so. */
const plainName = text.regex(/^[a-z0-9() ]+$/)

const SoluteRow = z.strictObject({
  name: plainName,
  aliases: z.array(plainName),
  molarMass_kg_mol: positive('a molar mass', 'kg/mol'),
  k: positive('the osmolality of one mole', 'osmol/mol'),
  beta: z.number(),
  gamma: z.number(),
  delta: z.number(),
  fittedTo_kg_kg: fraction_kg_kg,
  maxError_K: notNegative('an error', 'K'),
  errorBelow2K_K: notNegative('an error', 'K'),
  otherCp_kJ_kgK: z.number(),
  source: text,
  cpSource: text,
})

const SoluteFile = z.strictObject({
  revision: z.int().min(1),
  about: text,
  sources: z.record(text, text),
  solutes: z.array(SoluteRow).min(1),
})

const rising = z.tuple([z.number(), z.number()]).refine(([low, high]) => low < high)

const PriorsFile = z.strictObject({
  revision: z.int().min(1),
  about: text,
  nu: positive('the shape of a gamma', 'no unit'),
  nuSource: text,
  volumeExponent: z.strictObject({
    above_m3: positive('a volume', 'm³'),
    range: rising,
    source: text,
  }),
  previouslyFrozen: z.strictObject({ decades: z.number(), source: text }),
  classes: z.record(
    NucleationClass,
    z.strictObject({
      log10Kappa: z.strictObject({
        mean: z.number(),
        sd: positive('a spread', 'decades'),
      }),
      b: rising,
      source: text,
    }),
  ),
})

/**
 * The folder that holds package.json. The same file runs from the sources and from `dist`, so the
 * way up is walked and not counted.
 */
export function projectRoot(): string {
  let folder = dirname(fileURLToPath(import.meta.url))
  while (!existsSync(join(folder, 'package.json'))) {
    const up = dirname(folder)
    if (up === folder) throw new Error('no package.json above the program: it was taken apart')
    folder = up
  }
  return folder
}

const read = <T extends z.ZodType>(name: string, shape: T): z.output<T> =>
  parse(
    shape,
    JSON.parse(readFileSync(join(projectRoot(), 'config', 'library', name), 'utf8')) as unknown,
  )

/** The solute table alone: what the physics commands need. */
export function readSolutes() {
  return read('solutes.json', SoluteFile)
}

/**
 * All that the program ships as data, checked.
 *
 * @throws Refusal with the path of the first wrong entry
 */
export function readLibrary() {
  return {
    solutes: readSolutes(),
    priors: read('priors.json', PriorsFile),
    cautions: read('cautions.json', CautionTable),
  }
}
