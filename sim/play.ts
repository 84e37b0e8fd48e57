import { parseArgs } from 'node:util'
import { readLibrary } from '../config/library/read.js'
import { Refusal } from '../config/schema/refusal.js'
import { writeFiles } from './files.js'
import { playLive } from './live.js'
import { scenarioOf, scenarios, siteOf } from './scenarios.js'
import { shifted } from './shift.js'
import { worldOf } from './world.js'

const help = `npm run -s sim -- --scenario NAME [--seed N] [options]

  --list             one JSON line per scenario: id, title, objective
  --scenario NAME    which one to play
  --seed N           whole number; the same seed gives the same bytes
  --truth FILE       write what truly happened, JSON lines
  --site FILE        write the site file
  --readings FILE    write what the probes read, JSON lines
  --mqtt URL         publish to a broker: mqtt://host:port; files asked for are written first
  --speed N          simulated seconds per second with --mqtt (60); the scenario then begins in
                     the past and reaches the present at its end
  --help             this text
`

const number = (
  name: string,
  text: string | undefined,
  standard: number,
  low: number,
  high: number,
): number => {
  if (text === undefined) return standard
  const n = Number(text)
  if (text.trim() !== '' && n >= low && n <= high) return n
  throw new Refusal(
    'out-of-range',
    name,
    text,
    `it is no number from ${low} to ${high}`,
    `write ${name} ${standard}`,
  )
}

const options = {
  list: { type: 'boolean' },
  help: { type: 'boolean' },
  scenario: { type: 'string' },
  seed: { type: 'string' },
  truth: { type: 'string' },
  site: { type: 'string' },
  readings: { type: 'string' },
  mqtt: { type: 'string' },
  speed: { type: 'string' },
} as const

const brokerOf = (text: string): string => {
  if (/^(mqtt|ws)s?:$/.test(URL.canParse(text) ? new URL(text).protocol : '')) return text
  throw new Refusal(
    'bad-url',
    '--mqtt',
    text,
    'it is no address of a broker',
    'write --mqtt mqtt://127.0.0.1:1883',
  )
}

const argumentsOf = (argv: string[]) => {
  try {
    return parseArgs({ args: argv, options }).values
  } catch (error) {
    throw new Refusal(
      'usage',
      'arguments',
      argv.join(' '),
      error instanceof Error ? error.message : '',
      'see --help',
      { cause: error },
    )
  }
}

/** The simulator as a command: files, or MQTT traffic at a clock of its own. */
const play = (argv: string[]): void => {
  const given = argumentsOf(argv)
  if (given.help) return void process.stdout.write(help)
  if (given.list) {
    for (const { id, title, objective } of scenarios())
      process.stdout.write(`${JSON.stringify({ id, title, objective })}\n`)
    return
  }
  if (given.scenario === undefined)
    throw new Refusal('missing', '--scenario', undefined, 'it is missing', 'give one of --list')
  const scenario = scenarioOf(given.scenario)
  const seed = number('--seed', given.seed, scenario.seed, 0, 2 ** 31 - 1)
  if (!Number.isInteger(seed))
    throw new Refusal(
      'out-of-range',
      '--seed',
      given.seed,
      'it is no whole number',
      'write --seed 1',
    )
  const speed = number('--speed', given.speed, 60, 0.1, 100_000)
  const { solutes } = readLibrary()
  const written = siteOf(scenario)
  const files = {
    truth: given.truth ?? null,
    site: given.site ?? null,
    readings: given.readings ?? null,
  }
  if (given.mqtt === undefined) {
    if (given.truth === undefined && given.site === undefined && given.readings === undefined)
      throw new Refusal(
        'missing',
        'arguments',
        argv.join(' '),
        'nothing to write to',
        'give --readings, --site or --truth, or --mqtt',
      )
    const world = worldOf(scenario, written, solutes, seed)
    const count = writeFiles(world, seed, files)
    return void process.stderr.write(`${count.readings} readings, ${count.turns} turns\n`)
  }
  const url = brokerOf(given.mqtt)
  // Faster than the wall's clock, it begins in the past and reaches the present at its end: a site
  // that runs on the wall's clock would otherwise hear of the future and believe none of it.
  const began_ms = Date.now()
  const start_ms = began_ms - Math.round(scenario.hours * 3_600_000 * Math.max(0, 1 - 1 / speed))
  const world = {
    ...worldOf(scenario, shifted(written, start_ms - Date.parse(scenario.start)), solutes, seed),
    start_ms,
  }
  // What will be is settled by scenario, seed and start, so it is written before it is played.
  if (Object.values(files).some((file) => file !== null)) writeFiles(world, seed, files)
  const end_ms = start_ms + scenario.hours * 3_600_000
  const now_ms = () => Math.min(end_ms, start_ms + (Date.now() - began_ms) * speed)
  const live = playLive({
    world,
    seed,
    url,
    saved: null,
    now_ms,
    keep: (state) => {
      if (world.start_ms + (state.t_s + 5) * 1000 > end_ms) void live.stop()
    },
    onFault: (error) => process.stderr.write(`${error instanceof Error ? error.message : error}\n`),
  })
  process.once('SIGINT', () => void live.stop())
  process.once('SIGTERM', () => void live.stop())
}

try {
  play(process.argv.slice(2))
} catch (error) {
  if (!(error instanceof Refusal)) throw error
  process.stderr.write(`${error.message}\n`)
  process.exitCode = 2
}
