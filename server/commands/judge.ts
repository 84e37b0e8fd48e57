import { createReadStream, readFileSync } from 'node:fs'
import { createInterface } from 'node:readline'
import { fileURLToPath } from 'node:url'
import { readLibrary } from '../../config/library/read.js'
import { parse } from '../../config/schema/parse.js'
import { type Reading, ReadingLine, readingOf } from '../../config/schema/reading.js'
import { siteRefusals } from '../../config/schema/readSite.js'
import { Refusal } from '../../config/schema/refusal.js'
import { SiteFile } from '../../config/schema/site.js'
import type { Verdict } from '../../config/schema/verdict.js'
import { wordsOf } from '../../config/words/read.js'
import { verdictOf } from '../watch/explain.js'
import { judgementOf } from '../watch/judgement.js'
import { type Plan, planOf } from '../watch/plan.js'
import { freshState, type GroupState } from '../watch/state.js'
import { type Event, replayed, step, tick_ms } from '../watch/step.js'

/** A line that could not be used, answered in its place. */
export type RefusedLine = {
  readonly id: number
  readonly line: number
  readonly error: {
    readonly code: string
    readonly field: string
    readonly message: string
    readonly remedy: string
  }
}

type Job = {
  readonly plan: Plan
  readonly lines: AsyncIterable<string> | Iterable<string>
  readonly every_ms: number | null
  readonly until_ms: number | null
  readonly say: (key: string, values?: Readonly<Record<string, string | number>>) => string
  readonly write: (answer: Verdict | RefusedLine) => void
}

/** A line as a reading. @throws Refusal of what is wrong with it */
const readingFrom = (text: string, plan: Plan): Reading => {
  let json: unknown
  try {
    json = JSON.parse(text)
  } catch (cause) {
    throw new Refusal(
      'not-json',
      '(the whole)',
      text,
      'this line is not JSON',
      'write one JSON object per line',
      { cause },
    )
  }
  const reading = readingOf(parse(ReadingLine, json))
  if (plan.probeIndex(reading.probe) >= 0) return reading
  throw new Refusal(
    'unknown-probe',
    'probe',
    reading.probe,
    'no such probe in the site file',
    'add it to `probes`, or correct its name',
  )
}

const refusedLine = (line: number, refusal: Refusal): RefusedLine => ({
  id: line,
  line,
  error: {
    code: refusal.code,
    field: refusal.field,
    message: refusal.message,
    remedy: refusal.remedy,
  },
})

/**
 * Readings replayed in file order, as if each arrived at its receipt time, through the same watch
 * as live (interfaces.md §4).
 *
 * Lines that arrive at one instant of the clock are one input. The clock is the greatest receipt
 * time so far: a line from before it is a late one.
 *
 * @returns how many lines were refused
 */
export async function judge(job: Job): Promise<number> {
  const { plan, every_ms } = job
  const states: GroupState[] = plan.groups.map((g) => freshState(plan, g))
  const all: Reading[][] = plan.groups.map(() => [])
  /** Clock at which a group was found to need all its readings again; −1 while it does not. */
  const stale: number[] = plan.groups.map(() => -1)
  let batch: Reading[] = []
  let clock_ms = Number.NEGATIVE_INFINITY
  let everyDone_ms = Number.NEGATIVE_INFINITY
  let refused = 0
  let line = 0

  const announce = (events: readonly Event[]): void => {
    const changes = events.flatMap((e) => (e.kind === 'changed' ? [e.judgement] : []))
    const order = (id: string) => plan.itemIndex(id)
    // The sort is stable: two changes of one item at one instant stay in their order.
    for (const j of changes.sort((a, b) => a.t_ms - b.t_ms || order(a.item) - order(b.item)))
      job.write(verdictOf(j, job.say))
  }

  /** Groups that need it are made anew from all that was received. */
  const replay = (events: Event[]): void => {
    for (const [k, since_ms] of stale.entries()) {
      if (since_ms < 0) continue
      const { state, events: more } = replayed(states[k]!, all[k]!, plan)
      states[k] = state
      events.push(...more)
      stale[k] = -1
    }
  }

  const moveTo = (now_ms: number, readings: readonly Reading[]): void => {
    const events: Event[] = []
    for (const [k, group] of plan.groups.entries()) {
      const own = readings.filter((r) => plan.groupOfProbe(r.probe) === group)
      const input =
        own.length > 0
          ? ({ kind: 'readings', readings: own, now_ms } as const)
          : ({ kind: 'clock', now_ms } as const)
      all[k]!.push(...own)
      const { state, events: more } = step(states[k]!, input, plan)
      states[k] = state
      events.push(...more)
      if (state.needsReplayFrom_ms !== null && stale[k]! < 0) stale[k] = now_ms
    }
    // A backfill comes line by line: it is walked through once per tick, not once per line.
    if (stale.some((s) => s >= 0 && now_ms - s >= tick_ms)) replay(events)
    announce(events)
  }

  const verdicts = (now_ms: number): void => {
    const events: Event[] = []
    replay(events)
    announce(events)
    for (const item of plan.items) {
      const k = plan.groupOfItem(item.id)!.index
      const judgement = judgementOf(states[k]!, item.index, plan, now_ms)
      if (judgement !== null) job.write(verdictOf(judgement, job.say))
    }
  }

  /** Every multiple of the interval that the clock has passed, with all received by then. */
  const everyUpTo = (now_ms: number): void => {
    if (every_ms === null || clock_ms === Number.NEGATIVE_INFINITY) return
    let t_ms = (Math.floor(everyDone_ms / every_ms) + 1) * every_ms
    for (; t_ms <= now_ms; t_ms += every_ms) {
      moveTo(t_ms, [])
      verdicts(t_ms)
      everyDone_ms = t_ms
    }
  }

  const flush = (): void => {
    if (batch.length === 0) return
    const own = batch
    batch = []
    moveTo(clock_ms, own)
  }

  for await (const text of job.lines) {
    line += 1
    if (text.trim() === '') continue
    let reading: Reading
    try {
      reading = readingFrom(text, plan)
    } catch (error) {
      if (!(error instanceof Refusal)) throw error
      refused += 1
      job.write(refusedLine(line, error))
      continue
    }
    const now_ms = Math.max(clock_ms, reading.receivedAt_ms)
    if (now_ms > clock_ms) {
      flush()
      if (clock_ms === Number.NEGATIVE_INFINITY && every_ms !== null) everyDone_ms = now_ms - 1
      everyUpTo(now_ms - 1)
      clock_ms = now_ms
    }
    batch.push(reading)
  }
  flush()
  const end_ms = Math.max(clock_ms, job.until_ms ?? Number.NEGATIVE_INFINITY)
  if (Number.isFinite(end_ms)) {
    everyUpTo(end_ms)
    moveTo(end_ms, [])
    verdicts(end_ms)
  }
  return refused
}

/** `60s`, `5min`, `1h` or a bare number of seconds, ms. */
const durationOf = (text: string): number => {
  const found = /^(\d+(?:\.\d+)?)(s|min|h)?$/.exec(text)
  const size = { s: 1000, min: 60_000, h: 3_600_000 }[found?.[2] ?? 's'] ?? 1000
  const ms = Number(found?.[1]) * size
  if (found === null || !(ms >= 1000))
    throw new Refusal(
      'bad-usage',
      '--every',
      text,
      'this is not a duration of a second or more',
      'write it as 60s, 5min or 1h',
    )
  return Math.round(ms)
}

const instantOf = (text: string): number => {
  const t_ms = Date.parse(text)
  if (/(Z|[+-]\d\d:\d\d)$/.test(text) && Number.isFinite(t_ms)) return t_ms
  throw new Refusal(
    'bad-usage',
    '--until',
    text,
    'this is not a time with its offset (RFC 3339)',
    'write it as 2026-01-05T03:10:00Z',
  )
}

const usage = 'judge -- --site site.json --readings readings.jsonl [--every 60s] [--until T]'

/** @throws Refusal 'bad-usage' */
export const argumentsOf = (given: readonly string[]) => {
  const known = ['--site', '--readings', '--every', '--until']
  const found = new Map<string, string>()
  for (let i = 0; i < given.length; i += 2) {
    const [name, value] = [
      given[i]!.split('=')[0]!,
      given[i]!.includes('=') ? given[i]!.slice(given[i]!.indexOf('=') + 1) : given[i + 1],
    ]
    if (!known.includes(name))
      throw new Refusal('bad-usage', name, value ?? '', 'this is not an option of judge', usage)
    if (value === undefined) throw new Refusal('bad-usage', name, '', 'its value is missing', usage)
    found.set(name, value)
    if (given[i]!.includes('=')) i -= 1
  }
  const need = (name: string): string => {
    const value = found.get(name)
    if (value === undefined) throw new Refusal('bad-usage', name, '', 'it is missing', usage)
    return value
  }
  const every = found.get('--every')
  const until = found.get('--until')
  return {
    site: need('--site'),
    readings: need('--readings'),
    every_ms: every === undefined ? null : durationOf(every),
    until_ms: until === undefined ? null : instantOf(until),
  }
}

/** The site file, or every reason to refuse it. */
const siteOf = (path: string): SiteFile | readonly Refusal[] => {
  let json: unknown
  try {
    json = JSON.parse(readFileSync(path, 'utf8'))
  } catch (cause) {
    const why = cause instanceof Error ? cause.message : String(cause)
    return [
      new Refusal('unreadable', '--site', path, why, 'give the path of a site file in JSON', {
        cause,
      }),
    ]
  }
  const refusals = siteRefusals(json)
  return refusals.length > 0 ? refusals : parse(SiteFile, json)
}

const complain = (refusals: readonly Refusal[]): number => {
  for (const r of refusals) process.stderr.write(`${r.message}\n`)
  return 2
}

/** @returns the exit code: 0 all answered, 2 bad usage or file, 3 some lines refused */
/** A reader that has seen enough (`| head`) closed the pipe; that is its right. */
class NobodyReads extends Error {}

export async function main(given: readonly string[]): Promise<number> {
  try {
    const args = argumentsOf(given)
    const site = siteOf(args.site)
    if (!('format' in site)) return complain(site)
    const plan = planOf(site, readLibrary())
    const input = args.readings === '-' ? process.stdin : createReadStream(args.readings)
    // Without it a file that is not there would be an exception that nobody catches.
    const opened = new Promise<void>((resolve, reject) => {
      input.once('error', (cause: Error) =>
        reject(
          new Refusal(
            'unreadable',
            '--readings',
            args.readings,
            cause.message,
            'give the path of a readings file, or - for standard input',
            { cause },
          ),
        ),
      )
      input.once('readable', () => resolve())
      input.once('end', () => resolve())
    })
    await opened
    let out = ''
    const put = async () => {
      if (out === '') return
      const text = out
      out = ''
      const taken = await new Promise<boolean>((done) =>
        process.stdout.write(text, (error) => done(!error)),
      )
      if (!taken) throw new NobodyReads()
    }
    const lines = async function* () {
      let k = 0
      for await (const text of createInterface({ input, crlfDelay: Number.POSITIVE_INFINITY })) {
        yield text
        if (++k % 256 === 0) await put()
      }
    }
    const refused = await judge({
      plan,
      lines: lines(),
      every_ms: args.every_ms,
      until_ms: args.until_ms,
      say: wordsOf('en'),
      write: (answer) => {
        out += `${JSON.stringify(answer)}\n`
      },
    })
    await put()
    return refused > 0 ? 3 : 0
  } catch (error) {
    if (error instanceof Refusal) return complain([error])
    if (error instanceof NobodyReads) return 0
    throw error
  }
}

if (process.argv[1] === fileURLToPath(import.meta.url)) {
  // The failed write itself is answered where it was made.
  process.stdout.on('error', () => undefined)
  process.exitCode = await main(process.argv.slice(2))
}
