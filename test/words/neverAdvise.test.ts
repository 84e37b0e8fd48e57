import { existsSync, readdirSync } from 'node:fs'
import { describe, expect, test } from 'vitest'
import { neverAdvise } from './neverAdvise.js'
import { offences, verdictWords } from './offences.js'
import {
  cautionTexts,
  htmlTexts,
  jsonTexts,
  literalsIn,
  literalTexts,
  proseTexts,
  type Text,
} from './texts.js'

describe.each(neverAdvise)('class $class: $title', (advice) => {
  test.each(advice.refused)('refuses: %s', (sentence) => {
    expect(offences(sentence).map((offence) => offence.class)).toContain(advice.class)
  })
  test.each(advice.allowed)('lets pass: %s', (sentence) => {
    expect(offences(sentence)).toEqual([])
  })
})

test('there are the thirteen classes of the trade, each with both kinds of examples', () => {
  expect(neverAdvise.map((advice) => advice.class)).toEqual(
    Array.from({ length: 13 }, (_, i) => i + 1),
  )
  for (const advice of neverAdvise) {
    expect(advice.refused.length).toBeGreaterThanOrEqual(3)
    expect(advice.allowed.length).toBeGreaterThanOrEqual(2)
  }
})

const catalogues = jsonTexts('config/words')
const cautions = cautionTexts('config/library/cautions.json')
const screens = [...literalTexts('client'), ...htmlTexts('client')]
const scenarios = jsonTexts('config/scenarios')
const demo = jsonTexts('config/demo')
// Refusals, outages, help: a person reads these too.
const messages = [
  ...literalTexts('server'),
  ...literalTexts('config/schema'),
  ...literalTexts('sim'),
]
const pages = ['README.md', 'DEVELOPERS.md'].flatMap(proseTexts)

const advised = (texts: readonly Text[]) =>
  texts.flatMap(({ at, text }) => offences(text).map((offence) => ({ at, ...offence })))

test.each([
  { what: 'cautions', texts: cautions },
  { what: 'sentences of the catalogues', texts: catalogues },
  { what: 'literals of the screens', texts: screens },
  { what: 'practice scenarios', texts: scenarios },
  { what: 'demo site', texts: demo },
  { what: 'messages of the server', texts: messages },
  { what: 'README and DEVELOPERS', texts: pages },
])('nothing is advised that may not be: $what', ({ texts }) => {
  expect(advised(texts)).toEqual([])
})

test('the lint reads what it should: cautions and messages are not empty', () => {
  expect(cautions.length).toBeGreaterThan(100)
  expect(messages.length).toBeGreaterThan(100)
  expect(catalogues.length).toBeGreaterThan(100)
  expect(screens.filter(({ at }) => at.endsWith('.html')).length).toBeGreaterThan(0)
  expect(pages.length).toBeGreaterThan(20)
})

test('a forbidden line put among the cautions is found, under "Do" and not under "Do not"', () => {
  const line = 'Shake it to test for ice.'
  expect(advised([{ at: 'do', text: line }])).toHaveLength(1)
  expect(advised([{ at: 'do not', text: `Do not ${line.toLowerCase()}` }])).toEqual([])
})

// 'good' alone is the quality mark of a reading (interfaces of the program), never a word on a screen.
const passesVerdict = ({ text }: Text) => text !== 'good' && verdictWords.test(text)

test.each([
  { what: 'cautions', texts: cautions },
  { what: 'sentences of the catalogues', texts: catalogues },
  { what: 'literals of the screens', texts: screens },
  { what: 'practice scenarios', texts: scenarios },
  { what: 'README and DEVELOPERS', texts: pages },
])('no word passes a verdict or claims an approval: $what', ({ texts }) => {
  expect(texts.filter(passesVerdict)).toEqual([])
})

test.each([
  'OK',
  'The item is safe',
  'Looks good',
  'fit for use',
  'validated for GMP',
  'Part 11 compliant',
])('the word lint refuses: %s', (text) => {
  expect(passesVerdict({ at: '', text })).toBe(true)
})

test('literals are found in quotes, in templates and between tags, not in comments or imports', () => {
  const source = [
    "import { say } from './say.js'",
    "const a = 'one' // 'not this'",
    'const b = `two`',
    'const c = <p class="three">four five</p>',
  ].join('\n')
  expect(literalsIn(source)).toEqual(['one', 'two', 'three', 'four five'])
})

test('every language of the catalogues has patterns of its own', () => {
  const languages = existsSync('config/words')
    ? readdirSync('config/words', { withFileTypes: true }).filter((entry) => entry.isDirectory())
    : []
  expect(languages.map((entry) => entry.name)).toEqual(['en'])
})
