import { beforeAll, describe, expect, test } from 'vitest'
import { readLibrary } from '../../config/library/read.js'
import type { Verdict } from '../../config/schema/verdict.js'
import { wordsOf } from '../../config/words/read.js'
import { judge } from '../../server/commands/judge.js'
import { planOf } from '../../server/watch/plan.js'
import {
  everyCautionReadings,
  everyCautionSite,
  everyCautionUntil_ms,
} from './everyCaution.site.js'

/** Verdicts of the whole story, by the same code that `npm run -s judge` runs. */
let verdicts: readonly Verdict[] = []

beforeAll(async () => {
  const written: Verdict[] = []
  const refused = await judge({
    plan: planOf(everyCautionSite, readLibrary()),
    lines: everyCautionReadings.map((line) => JSON.stringify(line)),
    every_ms: 10 * 60_000,
    until_ms: everyCautionUntil_ms,
    say: wordsOf('en'),
    write: (answer) => {
      if ('standing' in answer) written.push(answer)
    },
  })
  expect(refused).toBe(0)
  verdicts = written
})

/** Every situation of the trade's handling cautions, and the item that comes into it. */
describe('every situation of the handling cautions is reached through judge', () => {
  test.each([
    { situation: 'supercooled vials or syringes', item: 'vials-below', key: 'supercooled-vial' },
    { situation: 'supercooled bottles or cans', item: 'ale-below', key: 'supercooled-bottle' },
    { situation: 'supercooled tank, IBC or pipe', item: 'juice-below', key: 'supercooled-tank' },
    { situation: 'supercooled food', item: 'fillets-below', key: 'supercooled-food' },
    { situation: 'superchilled on purpose', item: 'superchilled', key: 'intended-supercooled' },
    { situation: 'just nucleated', item: 'vials-turn', key: 'just-turned' },
    { situation: 'freezing or frozen, not meant', item: 'vials-turn', key: 'frozen-not-meant' },
    { situation: 'thawing or thawed', item: 'vials-thaw', key: 'thawed' },
    { situation: 'meant to be frozen, warming', item: 'plasma-warms', key: 'meant-frozen-warming' },
    {
      situation: 'meant to be frozen, liquid',
      item: 'bags-still-liquid',
      key: 'meant-frozen-liquid',
    },
    { situation: 'frozen as intended', item: 'plasma-warms', key: 'intended-frozen' },
    { situation: 'dry ice', item: 'reagent-on-dry-ice', key: 'dry-ice' },
    { situation: 'liquid nitrogen or vapour', item: 'cells-in-vapour', key: 'liquid-nitrogen' },
    { situation: 'sealed vials from it', item: 'cells-in-vapour', key: 'sealed-ln2-vial' },
    { situation: 'pressurised cans or kegs', item: 'ale-below', key: 'pressure' },
    { situation: 'sealed glass', item: 'vials-below', key: 'glass' },
    { situation: 'broken glass or a leak', item: 'vials-turn', key: 'broken-glass' },
    { situation: 'lifting, and cold rooms', item: 'fillets-below', key: 'lifting-cold-room' },
    { situation: 'electrical or refrigeration plant', item: 'vials-turn', key: 'electrical-plant' },
    { situation: 'power loss', item: 'unheard', key: 'power-loss' },
    { situation: 'nothing heard', item: 'unheard', key: 'state-unknown' },
    { situation: 'at its line', item: 'near', key: 'near-line' },
    { situation: 'adsorbed vaccine', item: 'vials-below', key: 'adsorbed' },
  ])('$situation: $item comes to $key', ({ item, key }) => {
    const seen = verdicts.filter((verdict) => verdict.item === item)
    expect(seen.length).toBeGreaterThan(0)
    expect([...new Set(seen.flatMap((verdict) => verdict.cautions))]).toContain(key)
  })

  test('and no row of the table is left out', () => {
    const reached = new Set(verdicts.flatMap((verdict) => verdict.cautions))
    const rows = readLibrary().cautions.map((row) => row.key)
    expect(rows.filter((key) => !reached.has(key))).toEqual([])
  })
})

test('every verdict but Above carries a caution', () => {
  expect(new Set(verdicts.map((verdict) => verdict.standing))).toContain('Above')
  expect(
    verdicts.filter(({ standing, cautions }) => standing !== 'Above' && cautions.length === 0),
  ).toEqual([])
})
