// While writing: rebuilds server and pages whenever a source changes, and restarts the server.
// Options go to the server: `npm run dev -- --port 8081`.
import { spawn } from 'node:child_process'
import { dirname, join } from 'node:path'
import { fileURLToPath } from 'node:url'

const root = join(dirname(fileURLToPath(import.meta.url)), '..', '..')

const run = (...args) =>
  spawn(process.execPath, args, { cwd: root, stdio: ['ignore', 'inherit', 'inherit'] })

// A first whole build, so that the server finds something to start.
const first = run('config/tools/ensure-build.mjs')
first.on('exit', (code) => {
  if (code !== 0) process.exit(code ?? 1)
  const watchers = [
    run(
      'node_modules/typescript/bin/tsc',
      ...['-p', 'config/tools/server.tsconfig.json', '--watch', '--preserveWatchOutput'],
    ),
    run(
      'node_modules/vite/bin/vite.js',
      ...['build', '--watch', '--config', 'config/tools/vite.config.ts', '--logLevel', 'warn'],
    ),
    run(...['--watch', '--enable-source-maps', 'dist/server/main.js'], ...process.argv.slice(2)),
  ]
  for (const signal of ['SIGINT', 'SIGTERM'])
    process.on(signal, () => {
      for (const watcher of watchers) watcher.kill(signal)
      process.exit(0)
    })
})
