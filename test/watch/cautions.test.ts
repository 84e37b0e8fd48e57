import { readFileSync } from 'node:fs'
import fc from 'fast-check'
import { expect, test } from 'vitest'
import type { CautionRow } from '../../config/schema/api.js'
import { type Caution, CautionTable } from '../../config/schema/caution.js'
import { parse } from '../../config/schema/parse.js'
import { Harm } from '../../config/schema/product.js'
import { StorageUnitKind } from '../../config/schema/site.js'
import { Phase, Standing } from '../../config/schema/verdict.js'
import { cautionsFor, type Situation, tagsOf } from '../../server/watch/cautions.js'

const table: readonly Caution[] = parse(
  CautionTable,
  JSON.parse(readFileSync('config/library/cautions.json', 'utf8')),
)
// The interface that the screens hold on to: a row that did not fit would not compile here.
const rows: readonly CautionRow[] = table

const vial = { fill_kg: 0.003, sealed: true }
const bottle = { fill_kg: 0.5, sealed: true }
const calm: Situation = {
  standing: 'Above',
  phase: 'liquid',
  harm: 'freezing',
  asIntended: false,
  hasBeenFrozen: false,
  container: vial,
  storageUnitKind: 'refrigerator',
  tags: [],
}
const supercooled = { standing: 'Poised', phase: 'supercooled' } as const
const turned = { standing: 'Turned', hasBeenFrozen: true } as const

/** The situations of the trade's handling cautions, one row each. */
test.each<{ situation: string; key: string; given: Partial<Situation> }>([
  { situation: 'supercooled vials or syringes', key: 'supercooled-vial', given: supercooled },
  {
    situation: 'supercooled bottles or cans',
    key: 'supercooled-bottle',
    given: { ...supercooled, container: bottle },
  },
  {
    situation: 'a supercooled tank, IBC or pipe',
    key: 'supercooled-tank',
    given: {
      ...supercooled,
      container: { fill_kg: 900, sealed: false },
      storageUnitKind: 'tank jacket',
    },
  },
  {
    situation: 'supercooled or superchilled food',
    key: 'supercooled-food',
    given: { ...supercooled, tags: ['food', 'tissue'], container: bottle },
  },
  {
    situation: 'superchilled on purpose',
    key: 'intended-supercooled',
    given: { ...supercooled, harm: 'meant-supercooled', asIntended: true },
  },
  { situation: 'just nucleated', key: 'just-turned', given: { ...turned, phase: 'freezing' } },
  {
    situation: 'frozen, not meant to be',
    key: 'frozen-not-meant',
    given: { ...turned, phase: 'frozen' },
  },
  { situation: 'thawing after freezing', key: 'thawed', given: { ...turned, phase: 'thawing' } },
  { situation: 'thawed after freezing', key: 'thawed', given: { ...turned, phase: 'liquid' } },
  {
    situation: 'meant to be frozen, warming',
    key: 'meant-frozen-warming',
    given: { ...turned, phase: 'thawing', harm: 'thawing', storageUnitKind: 'freezer' },
  },
  {
    situation: 'frozen, as intended',
    key: 'intended-frozen',
    given: { ...turned, phase: 'frozen', harm: 'thawing', asIntended: true },
  },
  {
    situation: 'dry ice',
    key: 'dry-ice',
    given: { tags: ['dry-ice'], storageUnitKind: 'transport' },
  },
  {
    situation: 'liquid nitrogen or vapour store',
    key: 'liquid-nitrogen',
    given: { storageUnitKind: 'dewar' },
  },
  {
    situation: 'sealed vials from liquid nitrogen',
    key: 'sealed-ln2-vial',
    given: { storageUnitKind: 'dewar' },
  },
  {
    situation: 'pressurised cans or kegs',
    key: 'pressure',
    given: { ...supercooled, tags: ['carbonated'] },
  },
  { situation: 'sealed glass', key: 'glass', given: { ...supercooled, tags: ['glass'] } },
  {
    situation: 'broken glass or a leak',
    key: 'broken-glass',
    given: { ...turned, phase: 'frozen', tags: ['glass', 'biological'] },
  },
  {
    situation: 'lifting, and cold rooms',
    key: 'lifting-cold-room',
    given: { ...supercooled, storageUnitKind: 'cold room' },
  },
  {
    situation: 'electrical or refrigeration plant',
    key: 'electrical-plant',
    given: { ...supercooled, storageUnitKind: 'freezer' },
  },
  {
    situation: 'power loss',
    key: 'power-loss',
    given: { standing: 'Silent', phase: 'unknown', storageUnitKind: 'freezer' },
  },
  {
    situation: 'nothing trustworthy heard',
    key: 'state-unknown',
    given: { standing: 'Silent', phase: 'unknown' },
  },
])('$situation is answered by the row $key', ({ key, given }) => {
  expect(cautionsFor({ ...calm, ...given }, table)).toContain(key)
})

const situations: fc.Arbitrary<Situation> = fc.record({
  standing: fc.constantFrom(...Standing.options),
  phase: fc.constantFrom(...Phase.options),
  harm: fc.constantFrom(...Harm.options),
  asIntended: fc.boolean(),
  hasBeenFrozen: fc.boolean(),
  container: fc.record({
    fill_kg: fc.oneof(
      fc.constantFrom(0.001, 0.0999, 0.1, 99.9, 100, 5000),
      fc.double({ min: 1e-6, max: 1e5, noNaN: true }),
    ),
    sealed: fc.boolean(),
  }),
  storageUnitKind: fc.constantFrom(...StorageUnitKind.options),
  tags: fc.subarray([
    'glass',
    'pressure',
    'carbonated',
    'biological',
    'food',
    'tissue',
    'dry-ice',
    'liquid-nitrogen',
    'adsorbed',
    'cytotoxic',
    'a tag that no row knows',
  ]),
})

const anythingGoesWrong = { numRuns: 5000 }

test('law: every standing but Above has at least one caution', () => {
  fc.assert(
    fc.property(situations, (situation) => {
      fc.pre(situation.standing !== 'Above')
      expect(cautionsFor(situation, table).length).toBeGreaterThan(0)
    }),
    anythingGoesWrong,
  )
})

test('law: what is about the product itself is never missing below the line or after a turn', () => {
  const ofTheProduct = table
    .map((row) => row.key)
    .filter((key) => /supercooled|turned|frozen|thawed|unknown/.test(key))
  fc.assert(
    fc.property(situations, (situation) => {
      fc.pre(['Below', 'Poised', 'Turned', 'Silent'].includes(situation.standing))
      const keys = cautionsFor(situation, table)
      expect(keys.some((key) => ofTheProduct.includes(key))).toBe(true)
    }),
    anythingGoesWrong,
  )
})

test('law: the order is that of urgency, whatever the order of the table or of the tags', () => {
  const urgency = new Map(table.map((row) => [row.key, row.urgency]))
  fc.assert(
    fc.property(
      situations,
      fc.shuffledSubarray([...table], { minLength: table.length }),
      (situation, shuffled) => {
        const keys = cautionsFor(situation, table)
        const ranks = keys.map((key) => urgency.get(key) ?? 0)
        expect(ranks).toEqual([...ranks].sort((a, b) => a - b))
        expect(new Set(keys).size).toBe(keys.length)
        const turnedRound = { ...situation, tags: [...situation.tags].reverse() }
        expect(cautionsFor(turnedRound, shuffled)).toEqual(keys)
      },
    ),
  )
})

test('a danger to people stands before a danger to the product', () => {
  const keys = cautionsFor(
    { ...calm, ...supercooled, storageUnitKind: 'dewar', tags: ['glass'] },
    table,
  )
  expect(keys.indexOf('liquid-nitrogen')).toBe(0)
  expect(keys.indexOf('supercooled-vial')).toBeGreaterThan(0)
})

test('nobody is told to stop the cold of stock that is meant to be frozen', () => {
  fc.assert(
    fc.property(situations, (situation) => {
      fc.pre(situation.harm === 'thawing' && situation.standing !== 'Silent')
      const said = cautionsFor(situation, table).flatMap(
        (key) => table.find((row) => row.key === key)?.do ?? [],
      )
      expect(said.filter((line) => /stop the cold/i.test(line))).toEqual([])
    }),
  )
})

test('nobody is told that ice is liquid, or that liquid is ice', () => {
  fc.assert(
    fc.property(situations, (situation) => {
      fc.pre(situation.standing !== 'Turned')
      const keys = cautionsFor(situation, table)
      if (situation.phase === 'frozen') expect(keys).not.toContain('meant-frozen-liquid')
      if (situation.phase === 'liquid') expect(keys).not.toContain('intended-frozen')
    }),
    anythingGoesWrong,
  )
})

test('every row is reached by some situation', () => {
  const reached = new Set<string>()
  for (const situation of fc.sample(situations, { numRuns: 20_000, seed: 1 }))
    for (const key of cautionsFor(situation, table)) reached.add(key)
  expect(table.map((row) => row.key).filter((key) => !reached.has(key))).toEqual([])
})

test('every row closes by deferring to procedure, QA, manufacturer and licensed people', () => {
  for (const row of rows) {
    expect(row.closing).toContain('follow your site procedure; call QA.')
    expect(row.closing).toMatch(
      /Follow the manufacturer's instructions and your site procedure first; local codes and qualified\/licensed people decide for equipment, gases and medicines\.$/,
    )
  }
})

test('a food by composition, or by its nucleation class, need not say that it is a food', () => {
  const given = { cautions: ['carbonated'], freezing: { kind: 'water' } } as const
  const tags = (nucleation: 'food-liquid' | 'animal-tissue' | 'clean-solution') =>
    tagsOf({ ...given, cautions: [...given.cautions], nucleation })
  expect(tags('food-liquid')).toEqual(['carbonated', 'food'])
  expect(tags('animal-tissue')).toEqual(['carbonated', 'food', 'tissue'])
  expect(tags('clean-solution')).toEqual(['carbonated'])
})
