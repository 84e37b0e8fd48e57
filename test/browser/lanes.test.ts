import fc from 'fast-check'
import { expect, test } from 'vitest'
import { type LaneRules, lanesOf, layoutLanes } from '../../client/chart/lanes.js'
import type { StorageUnitView } from '../../config/schema/api.js'
import type { StorageUnitId } from '../../config/schema/site.js'
import { Standing } from '../../config/schema/verdict.js'
import { madeItem, policy } from './made.js'

const unit = (id: string): StorageUnitView => ({
  id: id as StorageUnitId,
  name: id,
  kind: 'cold room',
  air_C: 4,
  airAt_ms: 0,
  windows: [],
})
const units = ['A', 'B', 'C'].map(unit)
const rules = (over: Partial<LaneRules> = {}): LaneRules => ({
  width: 900,
  least: 13,
  comfortable: 17,
  leastBay: 46,
  gap: 8,
  fixed: null,
  foldBeyond: 60,
  opened: new Set(),
  ...over,
})

const anyItems = fc
  .array(
    fc.record({
      unit: fc.constantFrom('A', 'B', 'C'),
      standing: fc.constantFrom(...Standing.options),
    }),
    { maxLength: 120 },
  )
  .map((made) => made.map((m, i) => madeItem(`i${i}`, m)))

const idsInOrder = (layout: ReturnType<typeof layoutLanes>): string[] =>
  lanesOf(layout).flatMap((p) => (p.kind === 'lane' ? [p.item.id] : p.items.map((i) => i.id)))

test('law: lanes keep the site’s order, whatever the standings and the width', () => {
  fc.assert(
    fc.property(anyItems, fc.integer({ min: 240, max: 2000 }), (items, width) => {
      const expected = units.flatMap((u) =>
        items.filter((i) => i.storageUnit === u.id).map((i) => i.id),
      )
      expect(idsInOrder(layoutLanes(units, items, policy, rules({ width })))).toEqual(expected)
    }),
  )
})

test('law: lanes lie side by side within their bay, and bays do not overlap', () => {
  fc.assert(
    fc.property(anyItems, fc.integer({ min: 240, max: 2000 }), (items, width) => {
      let edge = -1e-6
      for (const bay of layoutLanes(units, items, policy, rules({ width })).bays) {
        expect(bay.x).toBeGreaterThanOrEqual(edge)
        let x = bay.x
        for (const part of bay.parts) {
          expect(part.x).toBeCloseTo(x, 6)
          x += part.w
        }
        expect(x).toBeCloseTo(bay.x + bay.w, 6)
        edge = x
      }
    }),
  )
})

test('a lane that needs a hand is 2.7 times as wide as a calm one, a silent one 1.35 times', () => {
  const items = [
    madeItem('calm', { unit: 'A' }),
    madeItem('poised', { unit: 'A', standing: 'Poised' }),
    madeItem('silent', { unit: 'A', standing: 'Silent' }),
  ]
  const [calm, poised, silent] = lanesOf(layoutLanes(units, items, policy, rules()))
  expect((poised?.w ?? 0) / (calm?.w ?? 1)).toBeCloseTo(2.7, 6)
  expect((silent?.w ?? 0) / (calm?.w ?? 1)).toBeCloseTo(1.35, 6)
})

test('beyond sixty lanes calm neighbours fold, and open when asked', () => {
  const items = Array.from({ length: 90 }, (_, i) => madeItem(`i${i}`, { unit: 'A' }))
  const folded = lanesOf(layoutLanes(units, items, policy, rules({ width: 700 })))
  expect(folded.map((p) => p.kind)).toEqual(['fold'])
  const opened = new Set(items.map((i) => i.id))
  const open = lanesOf(layoutLanes(units, items, policy, rules({ width: 700, opened })))
  expect(open).toHaveLength(90)
})

test('what needs a hand is never folded away', () => {
  const items = Array.from({ length: 400 }, (_, i) =>
    madeItem(`i${i}`, { unit: 'B', standing: i % 40 === 7 ? 'Below' : 'Above' }),
  )
  const parts = lanesOf(layoutLanes(units, items, policy, rules()))
  const inFolds = parts.flatMap((p) => (p.kind === 'fold' ? p.items : []))
  expect(inFolds.filter((i) => i.verdict.standing === 'Below')).toEqual([])
  expect(inFolds.length).toBeGreaterThan(300)
})

test('on a phone every lane is 48 px wide', () => {
  const items = Array.from({ length: 9 }, (_, i) => madeItem(`i${i}`, { unit: 'A' }))
  const parts = lanesOf(layoutLanes(units, items, policy, rules({ fixed: 48, width: 280 })))
  expect(parts.map((p) => p.w)).toEqual(Array(9).fill(48))
})
