// Builds what is older than its sources. `server` builds the server alone (headless commands).
// Chatter goes to stderr, so that a command's answers on stdout stay clean. Two that start at
// once do not build into each other: the second waits for the first one's lock.
import { execFileSync } from 'node:child_process'
import {
  closeSync,
  existsSync,
  mkdirSync,
  openSync,
  readdirSync,
  readFileSync,
  rmSync,
  statSync,
  writeFileSync,
  writeSync,
} from 'node:fs'
import { dirname, join } from 'node:path'
import { fileURLToPath } from 'node:url'

const root = join(dirname(fileURLToPath(import.meta.url)), '..', '..')
const only = process.argv[2]

const newest = (path) => {
  if (!existsSync(path)) return 0
  const stat = statSync(path)
  if (!stat.isDirectory()) return stat.mtimeMs
  return readdirSync(path).reduce((most, name) => Math.max(most, newest(join(path, name))), 0)
}

const parts = {
  server: {
    sources: [
      'server',
      'sim',
      'config/schema',
      'config/library',
      'config/words',
      'test/bench',
      'config/tools/server.tsconfig.json',
      'tsconfig.json',
      'package-lock.json',
    ],
    stamp: 'dist/server.built',
    build: () => ['node_modules/typescript/bin/tsc', '-p', 'config/tools/server.tsconfig.json'],
  },
  client: {
    sources: [
      'client',
      'config/words',
      'config/schema',
      'config/tools/vite.config.ts',
      'package-lock.json',
    ],
    stamp: 'dist/client.built',
    build: () => [
      'node_modules/vite/bin/vite.js',
      'build',
      '--config',
      'config/tools/vite.config.ts',
      '--logLevel',
      'warn',
    ],
  },
}

const stale = ([, { sources, stamp }]) => {
  const built = existsSync(join(root, stamp)) ? Number(readFileSync(join(root, stamp), 'utf8')) : 0
  return sources.some((source) => newest(join(root, source)) > built)
}

const wanted = () =>
  Object.entries(parts)
    .filter(([name]) => !only || name === only)
    .filter(stale)

/** Runs `work` while holding the build lock; a lock whose holder has died is taken over. */
const locked = (work) => {
  mkdirSync(join(root, 'dist'), { recursive: true })
  const lock = join(root, 'dist', 'building.lock')
  const patience_ms = 300_000
  const since = Date.now()
  for (;;) {
    try {
      const file = openSync(lock, 'wx')
      writeSync(file, String(process.pid))
      closeSync(file)
      break
    } catch (error) {
      if (error.code !== 'EEXIST' || Date.now() - since > patience_ms) throw error
      const holder = Number(existsSync(lock) ? readFileSync(lock, 'utf8') : 0)
      let alive = true
      try {
        if (holder) process.kill(holder, 0)
      } catch (gone) {
        alive = gone.code !== 'ESRCH'
      }
      if (!alive) rmSync(lock, { force: true })
      else Atomics.wait(new Int32Array(new SharedArrayBuffer(4)), 0, 0, 100)
    }
  }
  try {
    work()
  } finally {
    rmSync(lock, { force: true })
  }
}

if (wanted().length > 0) {
  locked(() => {
    for (const [name, { stamp, build }] of wanted()) {
      // The stamp bears the time before the build: a source saved meanwhile is newer than it.
      const started = Date.now()
      console.error(`Building the ${name}…`)
      execFileSync(process.execPath, build(), { cwd: root, stdio: ['ignore', 2, 2] })
      writeFileSync(join(root, stamp), String(started))
    }
  })
}
