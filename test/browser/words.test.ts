import { readdirSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { expect, test } from 'vitest'
import { say } from '../../client/words.js'
import { Evidence, Limit, Phase, Standing } from '../../config/schema/verdict.js'
import screen from '../../config/words/en/screen.json' with { type: 'json' }
import { rootFolder } from './root.js'

const sources = (dir: string): string[] =>
  readdirSync(dir, { withFileTypes: true }).flatMap((entry) =>
    entry.isDirectory()
      ? sources(join(dir, entry.name))
      : /\.tsx?$/.test(entry.name)
        ? [readFileSync(join(dir, entry.name), 'utf8')]
        : [],
  )
const code = sources(join(rootFolder(), 'client')).join('\n')
const keys = Object.keys(screen)
const known = new Set(keys)

/** Every quoted `part.of.keys` that the client holds. */
const quoted = [...code.matchAll(/['"]([a-z][A-Za-z]*\.[A-Za-z][\w .-]*)['"]/g)]
  .map((m) => m[1] ?? '')
  .filter((key) => !/\.(js|css|tsx?|json|svg)$/.test(key) && !/^(hoarline|socket)\./.test(key))
/** Keys made from a prefix and a value: say(`standing.${…}`), wordFor('budget', …). */
const prefixes = [
  ...[...code.matchAll(/`([a-z][A-Za-z]*)\.\$\{/g)].map((m) => `${m[1]}.`),
  'budget.', // the watch names the parts of its uncertainty: wordFor(part.key)
]

test('every sentence that the client asks for is in the catalogue', () => {
  expect(quoted.filter((key) => !known.has(key))).toEqual([])
})

test('the catalogue has no sentence that nobody says', () => {
  const used = new Set(quoted)
  const idle = keys.filter((k) => !used.has(k) && !prefixes.some((p) => k.startsWith(p)))
  expect(idle).toEqual([])
})

test.each([
  ['standing', Standing.options],
  ['phase', Phase.options],
  ['evidence', Evidence.options],
  ['limit', Limit.options],
] as const)('every %s has its word', (prefix, values) => {
  for (const value of values) expect(known.has(`${prefix}.${value}`)).toBe(true)
})

test('every sentence compiles and says itself', () => {
  const values = new Proxy(
    {},
    { get: (_, name) => (name === 'count' ? 2 : 'x'), has: () => true, ownKeys: () => [] },
  )
  for (const key of keys) expect(say(key, values)).not.toBe('')
})

test('no sentence calls a product good: OK, safe, good, fine, fit', () => {
  const verdicts = /\b(OK|okay|safe|good|fine|fit|unharmed|harmless)\b/i
  // The statement of what Hoarline is not says that it is no safety system.
  const guilty = Object.entries(screen).filter(([, t]) => verdicts.test(t))
  expect(guilty).toEqual([])
})

test('sentences have no exclamation marks', () => {
  expect(Object.entries(screen).filter(([, t]) => t.includes('!'))).toEqual([])
})
