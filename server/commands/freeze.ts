import { realpathSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { readSolutes } from '../../config/library/read.js'
import { FreezeQuestion } from '../../config/schema/question.js'
import { couplingOf, wallShare_kJ_kgK } from '../physics/container.js'
import { solidifying } from '../physics/freezingTime.js'
import { drivingForce_J_kg, entropyProduction_J_kgK } from '../physics/fusion.js'
import { jump } from '../physics/jump.js'
import type { SoluteTable } from '../physics/solution.js'
import { type Substance, substanceOf } from '../physics/substance.js'
import { type Answer, asked, askedAt, type Command, runCommand } from './ask.js'

/** What a reader must know of a product's figures down to a temperature. */
export const flagsOf = (s: Substance, coldest_C: number): string[] => [
  ...(s.extrapolated || (s.extrapolatedBelow_C !== null && coldest_C < s.extrapolatedBelow_C)
    ? ['extrapolated']
    : []),
  ...(s.stop?.kind === 'eutectic' && coldest_C < s.stop.T_C
    ? ['may stay liquid: eutectics supercool too']
    : []),
]

/**
 * What happens if ice forms now.
 *
 * @param question  interfaces.md §4
 * @throws          Refusal with the sender's own path
 */
export function freeze(question: unknown, solutes: SoluteTable): Answer {
  const q = asked(FreezeQuestion, question)
  const substance = askedAt('product', () => substanceOf(q.product, solutes))
  const { container, from_C } = q
  const air_C = q.air_C ?? null
  const wall_kJ_kgK = container === undefined ? 0 : wallShare_kJ_kgK(container)
  const coupling =
    container === undefined ? null : askedAt('container', () => couplingOf(container))
  const now = jump(substance, wall_kJ_kgK, from_C)
  const later = solidifying(
    substance,
    wall_kJ_kgK,
    now,
    air_C,
    coupling === null || container === undefined
      ? null
      : { UA_W_K: coupling.UA_W_K, fill_kg: container.fill_kg },
  )
  return {
    freezingPoint_C: substance.freezingPoint_C,
    freezingPoint_u_K: substance.freezingPoint_u_K,
    supercooling_K: Math.max(0, substance.freezingPoint_C - from_C),
    end_C: now.end_C,
    firstIce_kg_kg: now.firstIce_kg_kg,
    firstIce_ofWater: now.firstIce_ofWater,
    jump_K: now.jump_K,
    latentHeatAtEnd_kJ_kg: now.latentHeatAtEnd_kJ_kg,
    heatNow_kJ_kg: now.heatNow_kJ_kg,
    heatToSolid_kJ_kg: later.heatToSolid_kJ_kg,
    iceAtAir_kg_kg: later.iceAtAir_kg_kg,
    drivingForce_J_kg: drivingForce_J_kg(from_C, substance.osmolality_osmol_kg),
    entropyProduction_J_kgK: entropyProduction_J_kgK(from_C, substance.osmolality_osmol_kg),
    solid_h: later.solid_h,
    settlesAt_kg_kg: later.settlesAt_kg_kg,
    settle_h: later.settle_h,
    flags: flagsOf(substance, Math.max(-40, Math.min(now.end_C, air_C ?? -40))),
  }
}

const help = `npm run -s freeze < questions.jsonl

If it froze now: one question per line in, one answer per line out (JSON).

  {"id":"q1","product":{"freezing":{"kind":"solution","solutes":[{"name":"sodium chloride","kg_kg":0.009}]}},
   "container":{"fill_kg":0.01,"wall_kJ_K":0.009,"UA_W_K":0.02},"from_C":-8,"air_C":-10}

freezing   one of: measured, osmolality, solution, food, water
container  optional: fill_kg, wall_kJ_K, UA_W_K; or h_W_m2K with shape and lengths
from_C     temperature of the liquid, -40 to 60 °C
air_C      optional; without it solid_h is null and solid is at the stop temperature

Answers are per kg of product, wall included, to six digits; null is not known.
Exit status: 0 all answered, 2 bad usage, 3 some lines refused (each says why in its place).
`

/** The command itself, on a solute table. */
export const freezeCommand = (solutes: SoluteTable): Command => ({
  name: 'freeze',
  help,
  answer: (question) => freeze(question, solutes),
})

if (process.argv[1] && realpathSync(process.argv[1]) === fileURLToPath(import.meta.url))
  await runCommand(freezeCommand(readSolutes()))
