import { execFileSync } from 'node:child_process'
import { existsSync, readdirSync } from 'node:fs'
import { expect, test } from 'vitest'
import { readLibrary } from '../../config/library/read.js'
import { everyValue } from '../../config/schema/inForce.js'
import { refusalsOf } from '../../config/schema/parse.js'
import { readSite, siteRefusals } from '../../config/schema/readSite.js'
import { Scenario } from '../../config/schema/scenario.js'
import { read, treeFiles, under } from './tree.js'

const code = () =>
  ['server', 'client', 'sim', 'config', 'test'].flatMap((room) =>
    under(room, /\.(ts|tsx|mjs|cjs)$/),
  )

/** What is kept, where git can say so: notes of the moment in the folder are nobody's business. */
const keptFiles = () =>
  existsSync('.git')
    ? execFileSync('git', ['ls-files'], { encoding: 'utf8' }).split('\n').filter(existsSync)
    : treeFiles()

test('nothing stands on the top level but what the house has there', () => {
  const allowed = [
    ...['package.json', 'package-lock.json', 'tsconfig.json', '.npmrc', '.gitignore', '.ci'],
    ...['README.md', 'DEVELOPERS.md', 'LICENSE'],
    ...['server', 'client', 'sim', 'config', 'test'],
    // Made, and named in .gitignore.
    ...['node_modules', 'dist', 'data', 'coverage', '.git'],
  ]
  const found = readdirSync('.').filter((name) => !name.endsWith('.log') && !allowed.includes(name))
  expect(found).toEqual([])
})

test('what is made is not kept', () => {
  const ignored = read('.gitignore').split('\n')
  for (const name of ['node_modules/', 'dist/', '/data/']) expect(ignored).toContain(name)
})

test('no file names a path of the machine that it was written on', () => {
  // The start of an absolute path of a person's or a build machine's folder, in quotes or in prose.
  const machine = /(?<![\w.~/$}-])\/(work|root|home\/\w+|Users\/\w+|tmp|mnt|var\/tmp)\/[\w.-]+/
  const found = keptFiles()
    .filter((path) => !/\.(woff2?|png|ico|br|sqlite)$/.test(path))
    .flatMap((path) =>
      read(path)
        .split('\n')
        .map((line, i) => ({ at: `${path}:${i + 1}`, line }))
        .filter(({ line }) => machine.test(line) && !line.includes('(?<!')),
    )
  expect(found).toEqual([])
})

test('the lock file carries no address to download from', () => {
  const lock = read('package-lock.json')
  expect(JSON.parse(lock)).toHaveProperty('lockfileVersion', 3)
  expect(lock).not.toMatch(/"resolved"\s*:/)
  // Sponsors' pages stand in `funding`; a registry or a mirror would be an address of a package.
  expect(lock).not.toMatch(/https?:\/\/[^"]*\.tgz/)
})

test('every dependency is asked for by its exact version', () => {
  const { dependencies, devDependencies } = JSON.parse(read('package.json')) as Record<
    'dependencies' | 'devDependencies',
    Record<string, string>
  >
  const loose = Object.entries({ ...dependencies, ...devDependencies }).filter(
    ([, version]) => !/^\d+\.\d+\.\d+(-[\w.]+)?$/.test(version),
  )
  expect(loose).toEqual([])
})

test('every JSON of the house can be read', () => {
  const files = under('config', /\.json$/)
  expect(files.length).toBeGreaterThan(0)
  for (const path of files) expect(() => JSON.parse(read(path)), path).not.toThrow()
})

test('every scenario has its shape, and every site of the house is one that Hoarline takes', () => {
  const scenarios = under('config/scenarios', /\.json$/)
  expect(scenarios.length).toBeGreaterThan(0)
  for (const path of scenarios)
    expect(refusalsOf(Scenario, JSON.parse(read(path))), path).toEqual([])
  const sites = under('config/demo', /\.json$/)
  expect(sites.length).toBeGreaterThan(0)
  for (const path of sites) expect(siteRefusals(JSON.parse(read(path))), path).toEqual([])
})

test('what the demo stores calls for cautions by tags that some row knows', () => {
  const known = new Set(
    readLibrary().cautions.flatMap((row) =>
      row.when.flatMap((when) => [...(when.anyTag ?? []), ...(when.noTag ?? [])]),
    ),
  )
  for (const path of under('config/demo', /\.json$/)) {
    const site = readSite(JSON.parse(read(path)))
    const tags = site.products.flatMap(everyValue).flatMap((product) => product.cautions)
    expect(
      tags.filter((tag) => !known.has(tag)),
      path,
    ).toEqual([])
  }
})

test('no source outgrows what a person reads in one go', () => {
  // The house wants 80 to 200 lines; past 300 a second idea has often moved in. Here is the wall.
  const wall = 500
  const long = code()
    .filter((path) => !path.startsWith('test/')) // tables of cases run on
    .map((path) => ({ path, lines: read(path).split('\n').length }))
    .filter(({ lines }) => lines > wall)
  expect(long).toEqual([])
})

test('no barrel, no utils, nothing put off', () => {
  const names = code().filter((path) =>
    /(^|\/)(utils?|helpers?|common|misc)(\/|\.)|\/index\.tsx?$/i.test(path),
  )
  expect(names).toEqual([])
  const marks = new RegExp(
    `\\b(${['TO', 'FIX', 'XX'].map((a, i) => a + ['DO', 'ME', 'X'][i]).join('|')})\\b`,
  )
  expect(code().filter((path) => marks.test(read(path)))).toEqual([])
})

test('relative imports name the file that runs', () => {
  const found = code()
    .filter((path) => /\.tsx?$/.test(path))
    .flatMap((path) =>
      [...read(path).matchAll(/from '(\.[^']*)'/g)]
        .map((match) => match[1] ?? '')
        .filter((from) => !/\.(js|json|css|cjs|mjs)$/.test(from))
        .map((from) => `${path}: ${from}`),
    )
  expect(found).toEqual([])
})

test('the test command of the pages is the one that the checks run', () => {
  const run = read('.ci/run')
  expect(run).toContain('npm ci')
  expect(run).toContain('npm test')
  expect(run).not.toMatch(/npm (install|i) |apt|curl|wget/)
})

test.runIf(existsSync('.git'))('git keeps the check executable', () => {
  const listed = execFileSync('git', ['ls-files', '-s', '.ci/run'], { encoding: 'utf8' })
  expect(listed.slice(0, 6)).toBe('100755')
})
