import { expect, test } from 'vitest'
import { codeOf, importsOf, read, under } from './tree.js'

/** Rooms that decide: the same input gives the same answer, whenever and wherever. */
const pure = [
  'server/physics',
  'server/watch',
  'server/decode',
  'server/alarms',
  'server/record',
  'sim/model.ts',
  'sim/handling.ts',
]

/** Imports cannot catch these, and the linter's list of globals cannot forbid `Date` whole. */
const impure: readonly { readonly what: string; readonly found: RegExp }[] = [
  {
    what: 'a random number',
    found: /\bMath\s*\.\s*random\b|\bcrypto\s*\.\s*(random|getRandom)\w*/,
  },
  {
    what: 'the clock',
    found: /\bDate\s*\.\s*now\b|\bnew\s+Date\s*\(\s*\)|(?<![.\w])Date\s*\(\s*\)/,
  },
  { what: 'the clock', found: /\bperformance\s*\.|\bhrtime\b/ },
  { what: 'a timer', found: /(?<![.\w])(setTimeout|setInterval|setImmediate|queueMicrotask)\s*\(/ },
  { what: 'its surroundings', found: /(?<![.\w])(process|globalThis)\s*\./ },
  { what: 'a print', found: /(?<![.\w])console\s*\./ },
  { what: 'the net', found: /(?<![.\w])(fetch|WebSocket|XMLHttpRequest)\s*\(/ },
  { what: 'something loaded late', found: /(?<![.\w])(import|require)\s*\(/ },
]

const impurities = (source: string): string[] => {
  const code = codeOf(source)
  return [
    ...impure.filter(({ found }) => found.test(code)).map(({ what }) => what),
    ...importsOf(source)
      .filter(({ from }) => from.startsWith('node:') && from !== 'node:crypto')
      .map(({ from }) => from),
  ]
}

test.each(pure)('%s has no clock, no chance, no surroundings', (room) => {
  const found = under(room, /\.ts$/)
    .map((path) => ({ path, uses: impurities(read(path)) }))
    .filter(({ uses }) => uses.length > 0)
  expect(found).toEqual([])
})

test('the pure rooms are there to be scanned', () => {
  expect(pure.flatMap((room) => under(room, /\.ts$/)).length).toBeGreaterThan(0)
})

test.each([
  'const a = Math.random()',
  'const a = Date.now()',
  'const a = new Date()',
  'const a = new Date( )',
  'const a = performance.now()',
  'setTimeout(() => {}, 1)',
  'const a = process.env.HOME',
  "console.error('x')",
  "import { readFileSync } from 'node:fs'",
  "const a = await import('./x.js')",
])('the scan finds: %s', (source) => {
  expect(impurities(source)).not.toEqual([])
})

test.each([
  'const a = Date.parse(text)',
  'const a = new Date(t_ms).toISOString()',
  '// never Math.random() here',
  '/** as Date.now() would */',
  'const a = state.process.b',
])('the scan lets pass: %s', (source) => {
  expect(impurities(source)).toEqual([])
})
