import { spawnSync } from 'node:child_process'
import { cpSync, mkdirSync, mkdtempSync, rmSync, symlinkSync, writeFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import { tmpdir } from 'node:os'
import { dirname, join, normalize, resolve } from 'node:path'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { importsOf, read, under } from './tree.js'

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
    rule: 'store is SQL and nothing else',
    file: 'server/store/planted.ts',
    text: "import { cautionsFor } from '../watch/cautions.js'\nexport const a = cautionsFor\n",
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

// The cruiser is told of values only; see import-rules.cjs.
describe('types cross only where a rule lets the room know another, as a type at least', () => {
  type Rule = {
    readonly severity: string
    readonly from: { readonly path?: string }
    readonly to: {
      readonly path?: string | readonly string[]
      readonly pathNot?: string | readonly string[]
    }
  }
  const { forbidden } = createRequire(import.meta.url)(resolve(rulesFile)) as { forbidden: Rule[] }
  const among = (patterns: string | readonly string[] | undefined, path: string) =>
    [patterns ?? []].flat().some((pattern) => new RegExp(pattern).test(path))

  const breaches = (path: string, source: string): string[] => {
    const rooms = forbidden.filter(
      (rule) => rule.from.path && new RegExp(rule.from.path).test(path),
    )
    const walls = rooms.filter((rule) => rule.severity === 'error')
    const notes = rooms.filter((rule) => rule.severity === 'ignore')
    return importsOf(source)
      .filter(({ from, typesOnly }) => from.startsWith('.') && typesOnly)
      .map(({ from }) => normalize(join(dirname(path), from)).replace(/\.js$/, '.ts'))
      .filter(
        (to) =>
          walls.some((wall) => !among(wall.to.pathNot, to)) &&
          !notes.some((note) => among(note.to.path, to)),
      )
      .map((to) => `${path} → ${to}`)
  }

  test('in the tree', () => {
    const files = rooms.flatMap((room) => under(room, /\.tsx?$/))
    expect(files.flatMap((path) => breaches(path, read(path)))).toEqual([])
  })

  test.each([
    {
      room: 'server/store',
      source: "import type { State } from '../watch/state.js'",
      refused: false,
    },
    {
      room: 'server/physics',
      source: "import type { State } from '../watch/state.js'",
      refused: true,
    },
    { room: 'sim', source: "import { type State } from '../server/watch/state.js'", refused: true },
    {
      room: 'sim',
      source: "import {\n  type State,\n} from '../server/watch/state.js'",
      refused: true,
    },
    { room: 'sim', source: "// import type { a } from '../server/watch/state.js'", refused: false },
    { room: 'server/watch', source: "export type { A } from '../seam.js'", refused: true },
  ])('$room with $source', ({ room, source, refused }) => {
    expect(breaches(`${room}/planted.ts`, source).length > 0).toBe(refused)
  })
})

test.each([
  { source: "import type { State } from './state.js'", typesOnly: true },
  { source: "import { type State } from './state.js'", typesOnly: true },
  { source: "import { type State, step } from './state.js'", typesOnly: false },
  { source: "import step, { type State } from './state.js'", typesOnly: false },
  { source: "import * as all from './state.js'", typesOnly: false },
  { source: "export * from './state.js'", typesOnly: false },
])('types alone in $source: $typesOnly', ({ source, typesOnly }) => {
  expect(importsOf(source)).toEqual([{ from: './state.js', typesOnly }])
})
