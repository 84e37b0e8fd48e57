import fc from 'fast-check'
import { expect, test } from 'vitest'
import { Refusal } from '../../config/schema/refusal.js'
import { curveCommand } from '../../server/commands/curve.js'
import { freezeCommand } from '../../server/commands/freeze.js'
import { library } from './table.js'

const names = library.solutes.solutes.map((s) => s.name)
const wild = fc.oneof(
  fc.double({ min: -3, max: 3, noNaN: true }),
  fc.double({ noNaN: true, noDefaultInfinity: true }),
  fc.constantFrom(0, -0, 1, 1e-300, 1e300, 5e-324),
)
const part = fc.oneof(
  { weight: 5, arbitrary: fc.double({ min: 0, max: 1, noNaN: true }) },
  { weight: 1, arbitrary: wild },
)
const point = fc.oneof(fc.double({ min: -60, max: 0.01, noNaN: true }), wild)
const u = { u_K: fc.option(part, { nil: undefined }), relU: fc.option(part, { nil: undefined }) }

const freezing = fc.oneof(
  fc.record({
    kind: fc.constant('measured'),
    freezingPoint_C: point,
    water_kg_kg: part,
    bound_kg_kg: part,
    ...u,
  }),
  fc.record({
    kind: fc.constant('osmolality'),
    osmolality_osmol_kg: fc.oneof(fc.double({ min: 0, max: 25, noNaN: true }), wild),
    water_kg_kg: part,
    bound_kg_kg: part,
    ...u,
  }),
  fc.record({
    kind: fc.constant('solution'),
    solutes: fc.array(fc.record({ name: fc.constantFrom(...names), kg_kg: part }), {
      minLength: 1,
      maxLength: 4,
    }),
    ...u,
  }),
  fc.record({
    kind: fc.constant('food'),
    water_kg_kg: part,
    protein_kg_kg: part,
    fat_kg_kg: part,
    freezingPoint_C: point,
    ...u,
  }),
  fc.record({ kind: fc.constant('water'), ...u }),
)

const product = fc.record({
  freezing,
  liquidOther_cp_kJ_kgK: fc.option(fc.oneof(fc.double({ min: -3, max: 4, noNaN: true }), wild), {
    nil: undefined,
  }),
  stop: fc.option(fc.record({ T_C: point, kind: fc.constantFrom('eutectic', 'glass') }), {
    nil: undefined,
  }),
})

const positive = fc.double({ min: 1e-6, max: 1e4, noNaN: true })
const container = fc.record({
  fill_kg: positive,
  wall_kJ_K: fc.double({ min: 0, max: 100, noNaN: true }),
  UA_W_K: fc.option(positive, { nil: undefined }),
})

const t_C = fc.oneof(
  { weight: 6, arbitrary: fc.double({ min: -40, max: 60, noNaN: true }) },
  { weight: 1, arbitrary: wild },
)

const numbers = (value: unknown): number[] =>
  typeof value === 'number'
    ? [value]
    : typeof value === 'object' && value !== null
      ? Object.values(value).flatMap(numbers)
      : []

/** As it would come over a pipe: what JSON cannot say is gone. */
const plain = (value: unknown): unknown => JSON.parse(JSON.stringify(value)) as unknown

test('law: whatever is asked, freeze answers with finite numbers or refuses with a remedy', () => {
  const { answer } = freezeCommand(library.solutes)
  let answered = 0
  fc.assert(
    fc.property(
      product,
      fc.option(container, { nil: undefined }),
      t_C,
      fc.option(t_C, { nil: undefined }),
      (p, c, from_C, air_C) => {
        try {
          const found = numbers(answer(plain({ id: 1, product: p, container: c, from_C, air_C })))
          answered++
          for (const n of found) expect(n).toSatisfy(Number.isFinite)
        } catch (error) {
          if (!(error instanceof Refusal)) throw error
          expect(error.remedy).not.toBe('')
        }
      },
    ),
    { numRuns: 3000 },
  )
  // A law of refusals alone would hold for a program that refuses everything.
  expect(answered).toBeGreaterThan(300)
})

test('law: whatever is asked, curve answers with finite numbers or refuses with a remedy', () => {
  const { answer } = curveCommand(library.solutes)
  let answered = 0
  fc.assert(
    fc.property(product, fc.array(t_C, { maxLength: 5 }), (p, temperatures_C) => {
      try {
        const found = numbers(answer(plain({ id: 1, product: p, temperatures_C })))
        answered++
        for (const n of found) expect(n).toSatisfy(Number.isFinite)
      } catch (error) {
        if (!(error instanceof Refusal)) throw error
        expect(error.remedy).not.toBe('')
      }
    }),
    { numRuns: 3000 },
  )
  expect(answered).toBeGreaterThan(300)
})
