import { spawnSync } from 'node:child_process'
import { cpSync, mkdirSync, mkdtempSync, rmSync, symlinkSync, writeFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import { tmpdir } from 'node:os'
import { dirname, join, normalize, resolve } from 'node:path'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { importsOf, read, treeFiles, under } from './tree.js'

const rooms = ['server', 'client', 'sim', 'config']
const rulesFile = 'config/tools/import-rules.cjs'

type Cruised = {
  readonly modules: readonly { readonly source: string }[]
  readonly summary: {
    readonly error: number
    readonly totalCruised: number
    readonly violations: readonly {
      readonly from: string
      readonly to: string
      readonly rule: { readonly name: string; readonly severity: string }
    }[]
  }
}

const cruise = (folder: string): Cruised => {
  const bin = resolve('node_modules/dependency-cruiser/bin/dependency-cruise.mjs')
  const run = spawnSync(process.execPath, [bin, '--config', rulesFile, '-T', 'json', ...rooms], {
    cwd: folder,
    encoding: 'utf8',
    maxBuffer: 64 * 1024 * 1024,
  })
  if (run.stdout === '') throw new Error(run.stderr)
  return JSON.parse(run.stdout) as Cruised
}

const sources = () => rooms.flatMap((room) => under(room, /\.(ts|tsx|mjs|cjs)$/))

describe('the tree as it is', () => {
  let cruised: Cruised
  beforeAll(() => {
    cruised = cruise('.')
  })

  test('every source is cruised: none is passed over in silence', () => {
    const seen = new Set(cruised.modules.map((module) => module.source))
    expect(sources().length).toBeGreaterThan(0)
    expect(sources().filter((path) => !seen.has(path))).toEqual([])
  })

  test('no room imports what it may not', () => {
    expect(
      cruised.summary.violations.map(({ rule, from, to }) => `${rule.name}: ${from} → ${to}`),
    ).toEqual([])
  })
})

/** Imports that must be refused, by the rule that refuses them. */
const bad = [
  {
    rule: 'physics stands alone',
    file: 'server/physics/planted.ts',
    text: "import { cautionsFor } from '../watch/cautions.js'\nexport const a = cautionsFor\n",
  },
  {
    rule: 'physics stands alone',
    file: 'server/physics/plantedFile.ts',
    text: "import { readFileSync } from 'node:fs'\nexport const a = readFileSync\n",
  },
  {
    rule: 'watch is pure',
    file: 'server/watch/planted.ts',
    text: "import { randomBytes } from 'node:crypto'\nexport const a = randomBytes\n",
  },
  {
    rule: 'decode is pure',
    file: 'server/decode/planted.ts',
    text: "import { connect } from 'mqtt'\nexport const a = connect\n",
  },
  {
    rule: 'sim never sees the judge',
    file: 'sim/planted.ts',
    text: "import { cautionsFor } from '../server/watch/cautions.js'\nexport const a = cautionsFor\n",
  },
  {
    rule: 'client is a screen',
    file: 'client/planted.tsx',
    text: "import { readFileSync } from 'node:fs'\nexport const a = readFileSync\n",
  },
  {
    rule: 'schema knows shapes alone',
    file: 'config/schema/planted.ts',
    text: "import { partOf } from '../../server/seam.js'\nexport const a = partOf\n",
  },
  {
    rule: 'nobody imports test',
    file: 'server/planted.ts',
    text: "import { b } from '../test/planted.js'\nexport const a = b\n",
  },
  {
    rule: 'no circles',
    file: 'server/watch/plantedRound.ts',
    text: "import { a } from './plantedTrip.js'\nexport const b = () => a\n",
  },
  {
    rule: 'what is imported is there',
    file: 'server/plantedAway.ts',
    text: "import { a } from './nowhere.js'\nexport const b = a\n",
  },
] as const

describe('a copy with bad imports planted', () => {
  let folder = ''
  let cruised: Cruised

  beforeAll(() => {
    folder = mkdtempSync(join(tmpdir(), 'hoarline-rules-'))
    for (const room of rooms) cpSync(room, join(folder, room), { recursive: true })
    for (const file of ['tsconfig.json', 'package.json']) cpSync(file, join(folder, file))
    symlinkSync(resolve('node_modules'), join(folder, 'node_modules'))
    mkdirSync(join(folder, 'test'))
    writeFileSync(join(folder, 'test/planted.ts'), 'export const b = 1\n')
    writeFileSync(
      join(folder, 'server/watch/plantedTrip.ts'),
      "import { b } from './plantedRound.js'\nexport const a = () => b\n",
    )
    for (const { file, text } of bad) writeFileSync(join(folder, file), text)
    cruised = cruise(folder)
  })
  afterAll(() => rmSync(folder, { recursive: true, force: true }))

  test.each(bad)('$file is refused: $rule', ({ rule, file }) => {
    expect(
      cruised.summary.violations
        .filter((violation) => violation.from === file)
        .map((violation) => violation.rule.name),
    ).toContain(rule)
  })
})

// The cruiser's parser sees no difference between a type and a value; see import-rules.cjs.
describe('what a room may know only as a type, it imports only as a type', () => {
  type Rule = {
    readonly name: string
    readonly severity: string
    readonly from: { readonly path?: string }
    readonly to: { readonly path?: string | readonly string[] }
  }
  const { forbidden } = createRequire(import.meta.url)(resolve(rulesFile)) as { forbidden: Rule[] }
  const notes = forbidden.filter((rule) => rule.severity === 'ignore')

  const breaches = (path: string, source: string): string[] =>
    importsOf(source)
      .filter(({ from, typesOnly }) => from.startsWith('.') && !typesOnly)
      .map(({ from }) => normalize(join(dirname(path), from)).replace(/\.js$/, '.ts'))
      .filter((to) =>
        notes.some(
          (note) =>
            new RegExp(note.from.path ?? '^$').test(path) &&
            [note.to.path ?? []].flat().some((pattern) => new RegExp(pattern).test(to)),
        ),
      )
      .map((to) => `${path} → ${to}`)

  test('in the tree', () => {
    expect(notes.length).toBeGreaterThan(0)
    const files = treeFiles('server').filter((path) => path.endsWith('.ts'))
    expect(files.flatMap((path) => breaches(path, read(path)))).toEqual([])
  })

  test.each([
    { source: "import { step } from '../watch/step.js'", refused: true },
    { source: "import type { State } from '../watch/state.js'", refused: false },
    { source: "import { type State } from '../watch/state.js'", refused: false },
    { source: "import { type State, step } from '../watch/state.js'", refused: true },
    { source: "export * from '../watch/state.js'", refused: true },
    { source: "import {\n  a,\n  b,\n} from '../watch/state.js'", refused: true },
    { source: "// import { step } from '../watch/step.js'", refused: false },
  ])('a store that says $source', ({ source, refused }) => {
    expect(breaches('server/store/planted.ts', source).length > 0).toBe(refused)
  })
})
