import fc from 'fast-check'
import { expect, test } from 'vitest'
import { handsNeeded, notAssessable, tableOrder, withinUncertainty } from '../../client/hands.js'
import { headline, leadWords } from '../../client/sentences.js'
import { Standing } from '../../config/schema/verdict.js'
import { madeItem, policy } from './made.js'

const order = (items: Parameters<typeof handsNeeded>[0]) =>
  handsNeeded(items, policy).flatMap((e) => e.items.map((n) => n.item.id))

test('turned comes first, then poised, below, falling, silent (rulings.md 14)', () => {
  const items = [
    madeItem('silent', { standing: 'Silent', unit: 'A' }),
    madeItem('falling', { crossing: [0.2, 0.4, 1], unit: 'B' }),
    madeItem('below', { standing: 'Below', unit: 'C' }),
    madeItem('poised', { standing: 'Poised', unit: 'D' }),
    madeItem('turned', { standing: 'Turned', unit: 'E' }),
  ]
  expect(order(items)).toEqual(['turned', 'poised', 'below', 'falling', 'silent'])
})

test('poised items are ordered by their chance within an hour', () => {
  const items = [
    madeItem('less', { standing: 'Poised', any_1h: [0, 0.1, 0.2], unit: 'A' }),
    madeItem('more', { standing: 'Poised', any_1h: [0, 0.1, 0.9], unit: 'B' }),
  ]
  expect(order(items)).toEqual(['more', 'less'])
})

test('below items are ordered by the time to poised, and without one come last', () => {
  const items = [
    madeItem('never', { standing: 'Below', unit: 'A' }),
    madeItem('later', { standing: 'Below', unit: 'B', view: { poisedIn_h: [1, 2, 3] } }),
    madeItem('sooner', { standing: 'Below', unit: 'C', view: { poisedIn_h: [0.1, 0.2, 0.3] } }),
  ]
  expect(order(items)).toEqual(['sooner', 'later', 'never'])
})

test('falling items are ordered by the low end of their crossing', () => {
  const items = [
    madeItem('later', { crossing: [0.4, 0.5, 0.6], unit: 'A' }),
    madeItem('sooner', { crossing: [0.1, 2, 4], unit: 'B' }),
  ]
  expect(order(items)).toEqual(['sooner', 'later'])
})

test('equals are ordered by count', () => {
  const few = madeItem('few', { standing: 'Turned', unit: 'A', view: { count: 2 } })
  const many = madeItem('many', { standing: 'Turned', unit: 'B', view: { count: 200 } })
  expect(order([few, many])).toEqual(['many', 'few'])
})

test('held and as-intended items never appear', () => {
  const items = Standing.options.flatMap((standing) => [
    madeItem(`held ${standing}`, { standing, verdict: { heldBy: 'Ines Varga' } }),
    madeItem(`meant ${standing}`, { standing, verdict: { asIntended: true } }),
  ])
  expect(order(items)).toEqual([])
})

test('silent stock that freezing does not harm asks for nobody', () => {
  expect(order([madeItem('x', { standing: 'Silent', view: { harm: 'thawing' } })])).toEqual([])
})

test('near asks for a hand only when it is more likely below, or soon will be', () => {
  const calm = madeItem('calm', { standing: 'Near' })
  const likely = madeItem('likely', { standing: 'Near', verdict: { belowProbability: 0.5 } })
  const soon = madeItem('soon', { standing: 'Near', crossing: [0.1, 0.4, 2] })
  expect(order([calm, likely, soon]).sort()).toEqual(['likely', 'soon'])
  expect(withinUncertainty([calm, likely, soon], policy)).toBe(1)
})

test('one cause in one storage unit is one entry with its items', () => {
  const items = [
    madeItem('a', { standing: 'Turned', unit: 'CR-2' }),
    madeItem('b', { standing: 'Poised', unit: 'CR-2' }),
    madeItem('c', { crossing: [0.2, 0.4, 1], unit: 'CR-2' }),
    madeItem('d', { standing: 'Silent', unit: 'CR-2' }),
    madeItem('e', { standing: 'Below', unit: 'CR-3' }),
  ]
  const entries = handsNeeded(items, policy)
  expect(entries.map((e) => [e.storageUnit, e.cause, e.items.map((n) => n.item.id)])).toEqual([
    ['CR-2', 'cold', ['a', 'b', 'c']],
    ['CR-3', 'cold', ['e']],
    ['CR-2', 'silent', ['d']],
  ])
})

test('an announced turn that later readings took back stays on top until a person signs', () => {
  const withdrawn = madeItem('x', { standing: 'Above', view: { announcedTurned_ms: 1 } })
  const [entry] = handsNeeded([withdrawn], policy)
  expect(entry?.need).toBe('turned')
  expect(entry && headline(entry, { now_ms: 0, zone: 'UTC' })).toContain('A signature is awaited')
})

test('frozen stock that thaws against the intention is a cause of its own', () => {
  const thawing = madeItem('x', { standing: 'Turned', view: { harm: 'thawing' } })
  expect(handsNeeded([thawing], policy)[0]?.cause).toBe('warming')
})

test('the cautions of an entry stand most urgent first, each once', () => {
  const items = [
    madeItem('a', { standing: 'Turned', verdict: { cautions: ['just-turned', 'glass'] } }),
    madeItem('b', { standing: 'Below', verdict: { cautions: ['supercooled-vial', 'glass'] } }),
  ]
  expect(handsNeeded(items, policy)[0]?.cautions).toEqual([
    'just-turned',
    'glass',
    'supercooled-vial',
  ])
})

test('a lead reads as now, as an interval, or as unknown', () => {
  expect(leadWords({ kind: 'now' })).toBe('Now')
  expect(leadWords({ kind: 'within', h: [11 / 60, 0.4, 46 / 60] })).toBe('11…46 min')
  expect(leadWords({ kind: 'unknown' })).toBe('Lead unknown')
})

const anyItem = fc
  .record({
    id: fc.uuid(),
    standing: fc.constantFrom(...Standing.options),
    unit: fc.constantFrom('A', 'B', 'C'),
    low: fc.option(fc.double({ min: 0, max: 2, noNaN: true })),
  })
  .map(({ id, standing, unit, low }) =>
    madeItem(id, { standing, unit, crossing: low === null ? null : [low, low * 2, low * 3] }),
  )
const anyItems = fc.uniqueArray(anyItem, { selector: (i) => i.id, maxLength: 30 })

test('law: the order of the items does not change what needs a hand', () => {
  fc.assert(
    fc.property(
      anyItems.chain((items) =>
        fc.tuple(
          fc.constant(items),
          fc.shuffledSubarray(items, { minLength: items.length, maxLength: items.length }),
        ),
      ),
      ([one, other]) => {
        expect(handsNeeded(other, policy)).toEqual(handsNeeded(one, policy))
      },
    ),
  )
})

test('law: the table has every item once, those in Hands first and in their order', () => {
  fc.assert(
    fc.property(anyItems, (items) => {
      const entries = handsNeeded(items, policy)
      const rows = tableOrder(items, entries).map((r) => r.item.id)
      expect([...rows].sort()).toEqual(items.map((i) => i.id).sort())
      const inHands = entries.flatMap((e) => e.items.map((n) => n.item.id))
      expect(rows.slice(0, inHands.length)).toEqual(inHands)
    }),
  )
})

test('what cannot be assessed is counted', () => {
  expect(notAssessable([madeItem('a', { standing: 'Silent' }), madeItem('b')])).toBe(1)
})
