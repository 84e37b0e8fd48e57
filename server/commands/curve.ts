import { realpathSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { readSolutes } from '../../config/library/read.js'
import { CurveQuestion } from '../../config/schema/question.js'
import { Refusal } from '../../config/schema/refusal.js'
import { coldestLiquid_C, warmest_C } from '../physics/constants.js'
import {
  apparentCp_kJ_kgK,
  equilibriumEnthalpy_kJ_kg,
  ice_kg_kg,
  liquidEnthalpy_kJ_kg,
  liquidOsmolality_osmol_kg,
} from '../physics/curves.js'
import type { SoluteTable } from '../physics/solution.js'
import { substanceOf } from '../physics/substance.js'
import { type Answer, asked, askedAt, type Command, runCommand } from './ask.js'
import { flagsOf } from './freeze.js'

const within = (t_C: number, at: string): number => {
  if (t_C >= coldestLiquid_C && t_C <= warmest_C) return t_C
  throw new Refusal(
    'out-of-range',
    at,
    t_C,
    `both curves are known from ${coldestLiquid_C} to ${warmest_C} °C; colder, there is no liquid`,
    `give temperatures from ${coldestLiquid_C} to ${warmest_C} °C`,
  )
}

/**
 * The two curves of a product at given temperatures.
 *
 * @param question  interfaces.md §4
 * @throws          Refusal with the sender's own path
 */
export function curve(question: unknown, solutes: SoluteTable): Answer {
  const q = asked(CurveQuestion, question)
  const s = askedAt('product', () => substanceOf(q.product, solutes))
  const temperatures_C = q.temperatures_C.map((t, i) => within(t, `temperatures_C[${i}]`))
  return {
    freezingPoint_C: s.freezingPoint_C,
    freezingPoint_u_K: s.freezingPoint_u_K,
    points: temperatures_C.map((T_C) => ({
      T_C,
      liquid_h_kJ_kg: liquidEnthalpy_kJ_kg(s, T_C),
      equilibrium_h_kJ_kg: equilibriumEnthalpy_kJ_kg(s, T_C),
      ice_kg_kg: ice_kg_kg(s, T_C),
      liquidOsmolality_osmol_kg: liquidOsmolality_osmol_kg(s, T_C),
      cpApparent_kJ_kgK: apparentCp_kJ_kgK(s, T_C),
    })),
    flags: flagsOf(s, coldestOf(temperatures_C)),
  }
}

/** The spread of `Math.min(...)` would put every temperature on the stack. */
const coldestOf = (temperatures_C: readonly number[]): number =>
  temperatures_C.reduce((coldest, t) => Math.min(coldest, t), warmest_C)

const help = `npm run -s curve < questions.jsonl

The two curves of a product: one question per line in, one answer per line out (JSON).

  {"id":"c1","product":{"freezing":{"kind":"measured","freezingPoint_C":-0.53,"water_kg_kg":0.99}},
   "temperatures_C":[5,0,-0.5,-1,-5,-20]}

temperatures_C  -40 to 60 °C: colder, there is no liquid

Enthalpies are per kg of product, from the product liquid at 0 °C. cpApparent is that of the curve
in equilibrium with ice. Numbers have six digits.
Exit status: 0 all answered, 2 bad usage, 3 some lines refused (each says why in its place).
`

/** The command itself, on a solute table. */
export const curveCommand = (solutes: SoluteTable): Command => ({
  name: 'curve',
  help,
  answer: (question) => curve(question, solutes),
})

if (process.argv[1] && realpathSync(process.argv[1]) === fileURLToPath(import.meta.url))
  await runCommand(curveCommand(readSolutes()))
