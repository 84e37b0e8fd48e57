import { type Scored, score, tableOf } from './score.js'
import { type Kind, type Placement, trace } from './traces.js'

/** All kinds of traces over all placements, so many of each. */
export const suite = (perKind: number, seed: number) => {
  const placements: [Placement, boolean][] = [
    ['in-item', true],
    ['in-item', false],
    ['on-item-wall', true],
    ['on-item-wall', false],
    ['in-buffer', true],
    ['in-buffer', false],
  ]
  const kinds: [Kind, number][] = [
    ['turn', 4],
    ['quiet', 1],
    ['rewarm', 2],
    ['defrost', 2],
    ['iced', 1],
    ['pulled', 1],
    ['swapped', 1],
    ['stuck', 1],
    ['codes', 1],
    ['fahrenheit', 1],
    ['silent', 1],
    ['late', 1],
    ['frozen', 1],
    ['thaw', 1],
    ['turn-thaw', 1],
  ]
  let k = seed
  return placements.flatMap(([placement, withAir]) =>
    kinds.flatMap(([kind, share]) =>
      Array.from({ length: share * perKind }, () => {
        const own = k++
        return () => trace(own, kind, placement, withAir)
      }),
    ),
  )
}

export const runSuite = async (perKind: number, seed: number, each?: (s: Scored) => void) => {
  const all: Scored[] = []
  for (const make of suite(perKind, seed)) {
    const s = await score(make())
    all.push(s)
    each?.(s)
  }
  return { all, table: tableOf(all) }
}
