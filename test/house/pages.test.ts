import { existsSync } from 'node:fs'
import { expect, test } from 'vitest'
import { siteRefusals } from '../../config/schema/readSite.js'
import { help } from '../../server/settings.js'
import { read } from './tree.js'

const readme = read('README.md')
const developers = read('DEVELOPERS.md')
const scripts = Object.keys((JSON.parse(read('package.json')) as { scripts: object }).scripts)

/** Lines of the shell that a page gives to be typed. */
const commandsIn = (page: string): string[] =>
  [...page.matchAll(/```sh\n([\s\S]*?)```/g)]
    .flatMap((block) => (block[1] ?? '').split('\n'))
    .map((line) => line.trim())
    .filter((line) => line !== '' && !line.startsWith('#'))

test('the README opens with the job, in one paragraph', () => {
  const [title, job, next] = readme.split('\n\n')
  expect(title).toBe('# Hoarline')
  expect(job).toMatch(/freezing point/)
  expect(job).toMatch(/technician/)
  expect(job).toMatch(/alarm/)
  expect(next).toMatch(/^## /)
})

test('two commands do all the set-up, and they come first', () => {
  expect(commandsIn(readme).slice(0, 2)).toEqual(['npm ci && npm start', 'npm ci && npm test'])
})

test('the README says what Hoarline does not do, in the words agreed', () => {
  expect(readme.replace(/\s*\n>?\s*/g, ' ')).toContain(
    'Hoarline supports people who decide. It does not decide whether a product may be used, is not a safety system, not a gas alarm, not a medical device, and does not replace the site’s monitoring, alarms or procedures.'.replace(
      '’',
      "'",
    ),
  )
})

test('the table of settings is the one that --help prints', () => {
  const rows = [...help().matchAll(/^ {2}--([\w-]+) +(HOARLINE_\w+) +(\S+) +(.+)$/gm)]
  expect(rows.length).toBeGreaterThan(3)
  for (const [, flag, variable, standard, text] of rows)
    expect(readme).toContain(
      `| \`--${flag}\` | \`${variable}\` | ${standard === '–' ? '–' : `\`${standard}\``} | ${text} |`,
    )
  const named = new Set([...readme.matchAll(/HOARLINE_[A-Z_<>]+/g)].map((match) => match[0]))
  const printed = new Set([...help().matchAll(/HOARLINE_[A-Z_<>]+/g)].map((match) => match[0]))
  expect([...named].filter((name) => !printed.has(name) && name !== 'HOARLINE_NIGHTLY')).toEqual([])
})

test.each(['README.md', 'DEVELOPERS.md'])('every npm script that %s names exists', (page) => {
  const named = [...read(page).matchAll(/npm run (?:-s )?([a-z][\w-]*)/g)].map((m) => m[1] ?? '')
  expect(named.length).toBeGreaterThan(0)
  expect(named.filter((name) => !scripts.includes(name))).toEqual([])
})

test.each(['README.md', 'DEVELOPERS.md'])('every file that %s points at is there', (page) => {
  const pointed = [...read(page).matchAll(/`((?:server|client|sim|config|test)\/[\w./@-]*)`/g)]
    .map((match) => match[1] ?? '')
    .filter((path) => !/\b(name|Name)\b/.test(path))
  expect(pointed.length).toBeGreaterThan(0)
  expect(pointed.filter((path) => !existsSync(path))).toEqual([])
})

test('the routes that DEVELOPERS lists are those that there are', () => {
  const there = [...read('server/api/app.ts').matchAll(/api\.(get|put|post|delete)\(\s*'([^']+)'/g)]
  const routes = there.map(([, verb = '', path]) => `${verb.toUpperCase()} ${path}`)
  const listed = [...developers.matchAll(/^\| `((?:GET|PUT|POST|DELETE) [^`]+)`/gm)].map(
    (m) => m[1],
  )
  expect(listed).toEqual(routes)
})

test('the site file in the README is one that Hoarline takes', () => {
  const [, json = ''] = /```json\n([\s\S]*?)```/.exec(readme) ?? []
  expect(siteRefusals(JSON.parse(json))).toEqual([])
})

test('DEVELOPERS explains the layout, the rules, the walk of a reading, and how to add', () => {
  for (const heading of [
    'Layout',
    'Who may import whom',
    'One reading',
    'How to add',
    'Tests',
    'The clock',
    'Decisions',
  ])
    expect(developers).toContain(`## ${heading}`)
})
