import { parseArgs } from 'node:util'
import { instant } from '../../config/schema/must.js'
import { parse } from '../../config/schema/parse.js'
import { lineOf } from '../../config/schema/reading.js'
import { Refusal } from '../../config/schema/refusal.js'
import { openReader } from '../store/reader.js'

/** Readings fetched at a time: no read transaction is held while a slow pipe takes its lines. */
const page = 1000

const usage = 'npm run -s readings -- --data DIR [--probe P] [--from T] [--until T]'

const optionsOf = (argv: readonly string[]) => {
  try {
    return parseArgs({
      args: [...argv],
      strict: true,
      options: {
        data: { type: 'string' },
        probe: { type: 'string' },
        from: { type: 'string' },
        until: { type: 'string' },
      },
    }).values
  } catch (error) {
    if (!(error instanceof TypeError)) throw error
    throw new Refusal('unknown-option', 'options', argv.join(' '), error.message, `write ${usage}`)
  }
}

const timeOf = (name: string, text: string | undefined): number | null => {
  if (text === undefined) return null
  try {
    return Date.parse(parse(instant, text))
  } catch (error) {
    if (!(error instanceof Refusal)) throw error
    throw new Refusal(
      error.code,
      `--${name}`,
      text,
      error.problem,
      'write it like 2026-01-05T03:10:00Z',
    )
  }
}

/**
 * The stored readings as lines of interfaces.md §2, original values, in order of arrival;
 * conflicting values of one key among them.
 */
const run = (argv: readonly string[], write: (text: string) => Promise<void>) => {
  const { data, probe, from, until } = optionsOf(argv)
  if (data === undefined)
    throw new Refusal('missing', '--data', '', 'no folder is given', `write ${usage}`)
  const choice = {
    probe: probe ?? null,
    from_ms: timeOf('from', from),
    until_ms: timeOf('until', until),
  }
  const reader = openReader(data)
  const all = async () => {
    for (let after = 0; ; ) {
      const readings = reader.page(choice, after, page)
      const last = readings.at(-1)
      if (last === undefined) break
      await write(readings.map((r) => `${JSON.stringify(lineOf(r))}\n`).join(''))
      after = last.offset
    }
    reader.close()
  }
  return all()
}

const toStdout = (text: string): Promise<void> =>
  new Promise((resolve, reject) => {
    process.stdout.write(text, (error) => (error ? reject(error) : resolve()))
  })

// `… | head` closes the pipe early; that is no fault of anybody's.
process.stdout.on('error', (error: NodeJS.ErrnoException) => {
  if (error.code !== 'EPIPE') throw error
  process.exit(0)
})

try {
  await run(process.argv.slice(2), toStdout)
} catch (error) {
  if (!(error instanceof Refusal)) throw error
  console.error(error.message)
  process.exitCode = 2
}
