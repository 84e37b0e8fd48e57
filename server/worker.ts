import { createHash } from 'node:crypto'
import { parentPort, workerData } from 'node:worker_threads'
import { readLibrary } from '../config/library/read.js'
import type { Fan } from '../config/schema/api.js'
import { type Judgement, modelVersion } from '../config/schema/verdict.js'
import type { Judged } from './board.js'
import { historyOf } from './itemHistory.js'
import { type LoggedReading, type Offset, partOf } from './seam.js'
import type { Estimate } from './store/history.js'
import { openReader } from './store/reader.js'
import type { Snapshot } from './store/states.js'
import { curvesOf } from './watch/curves.js'
import { judgementOf } from './watch/judgement.js'
import { outlookOf, poisedIn_h, tintsOf } from './watch/outlook.js'
import { type Group, planOf } from './watch/plan.js'
import { freshState, type GroupState } from './watch/state.js'
import { type Input, replayed, step } from './watch/step.js'
import type { FromWatch, ToWatch, WatchStart } from './watching.js'

/**
 * The watch thread: consume → step → announce. It owns every partition of this machine. A slow
 * verdict here delays the screen and never a PUBACK (architecture.md §1.1).
 */

/** Readings taken from disk at a time. */
const page = 5000
/** States are saved at most this often, wall ms: after a crash so much is stepped again. */
const saveEvery_ms = 10_000
/** Items made anew for the screen in one tick, beside those with news. */
const shownPerTick = 400
/** A tick spends so much on the screen, wall ms; what is left over comes first in the next one. */
const showFor_ms = 60
/** A forecast on the Waterline reaches so far. */
const forecast_h = 0.5
/** An item sheet's reaches so far. */
const sheet_h = 8

const start = workerData as WatchStart
const port = parentPort
if (port === null) throw new Error('worker.ts runs as a thread')
const post = (message: FromWatch): void => port.postMessage(message)

const reader = openReader(start.data)
const plan = planOf(start.site, readLibrary())
const history = historyOf(plan, reader, start.now_ms)
/** States of another configuration are of no use: what it stands for goes with each snapshot. */
const configuration = createHash('sha256')
  .update(JSON.stringify(start.site))
  .digest()
  .readUIntBE(0, 6)

const states = new Map<string, GroupState>()
const parked = new Set<string>()
const lastJudged = new Map<number, Judgement>()
const news = new Set<number>()
const unsaved = new Set<string>()
const late = new Set<Group>()
let trail: Judgement[] = []
let offset: Offset = 0
let savedAt_ms = 0
let next = 0

/** One group's step. A fault of ours parks the group: never guess on (style.md §4). */
const stepped = (group: Group, input: Input | 'anew'): void => {
  if (parked.has(group.id)) return
  try {
    const state = states.get(group.id) ?? freshState(plan, group)
    const { state: after, events } =
      input === 'anew' ? madeAnew(group, state) : step(state, input, plan)
    states.set(group.id, after)
    // Once for all that came late together, at the next tick: a backlog must not cost its square.
    if (after.needsReplayFrom_ms !== null) late.add(group)
    unsaved.add(group.id)
    for (const event of events) {
      if (event.kind !== 'changed') continue
      const index = plan.itemIndex(event.judgement.item)
      history.changed(index, event.judgement, lastJudged.get(index) ?? null)
      lastJudged.set(index, event.judgement)
      trail.push(event.judgement)
      news.add(index)
    }
  } catch (error) {
    parked.add(group.id)
    const cause = error instanceof Error ? (error.stack ?? error.message) : String(error)
    post({ kind: 'parked', items: group.items.map((i) => plan.items[i]?.id ?? ''), cause })
  }
}

/** Readings in order of arrival, each at the clock at which it came, as a replay takes them. */
const feed = (readings: readonly LoggedReading[]): void => {
  let batch: LoggedReading[] = []
  let group: Group | null = null
  const flush = () => {
    const first = batch[0]
    if (group !== null && first !== undefined)
      stepped(group, { kind: 'readings', readings: batch, now_ms: first.receivedAt_ms })
    batch = []
  }
  for (const reading of readings) {
    const of = plan.groupOfProbe(reading.probe)
    if (of === null) continue
    const first = batch[0]
    if (first !== undefined && (of !== group || reading.receivedAt_ms !== first.receivedAt_ms))
      flush()
    group = of
    batch.push(reading)
    for (const index of of.items) news.add(index)
  }
  flush()
}

/** A reading came that is older than what a state remembers: the group is made anew from the log. */
const madeAnew = (group: Group, state: GroupState): ReturnType<typeof replayed> => {
  const readings: LoggedReading[] = []
  for (let from = 0; ; ) {
    const rows = reader.readAll(from, page)
    const last = rows.at(-1)
    if (last === undefined) break
    for (const row of rows)
      if (plan.groupOfProbe(row.probe)?.id === group.id && row.receivedAt_ms <= state.clock_ms)
        readings.push(row)
    from = last.offset
  }
  return replayed(state, readings, plan)
}

/** Everything on disk after what has been judged, up to an offset. */
const catchUp = (upTo: Offset): void => {
  while (offset < upTo) {
    const rows = reader.readAll(offset, page)
    const last = rows.at(-1)
    if (last === undefined) break
    feed(rows)
    offset = last.offset
    post({ kind: 'done', offset })
  }
}

/** States that were saved under the same configuration and model; without them, the whole log. */
const restore = (): void => {
  const saved = plan.groups.map((group) => {
    const row = reader.load(partOf(group.id))
    const usable =
      row !== null && row.model === modelVersion && row.configRevision === configuration
    // Cast: what this program saved under the same model and configuration.
    const all = usable ? (row.state as Record<string, GroupState>) : {}
    return { group, offset: row?.offset ?? 0, state: all[group.id] ?? null }
  })
  if (saved.some((s) => s.state === null)) return
  // Readings between the oldest snapshot and a newer one are stepped twice: a repeat is a no-op.
  offset = Math.min(...saved.map((s) => s.offset))
  for (const { group, state } of saved) if (state !== null) states.set(group.id, state)
}

const snapshots = (): Snapshot[] => {
  const parts = new Map<number, Record<string, GroupState>>()
  for (const group of plan.groups) {
    const state = states.get(group.id)
    if (state === undefined) continue
    const part = partOf(group.id)
    parts.set(part, { ...parts.get(part), [group.id]: state })
  }
  const changed = new Set([...unsaved].map((id) => partOf(id)))
  return [...parts]
    .filter(([part]) => changed.has(part))
    .map(([part, state]) => ({
      part,
      offset,
      model: modelVersion,
      configRevision: configuration,
      state,
    }))
}

const save = (estimates: readonly Estimate[], wall_ms: number): void => {
  const due = wall_ms - savedAt_ms >= saveEvery_ms
  const saved = due ? snapshots() : []
  if (due) {
    savedAt_ms = wall_ms
    unsaved.clear()
  }
  if (trail.length + estimates.length + saved.length > 0)
    post({ kind: 'save', trail, estimates, snapshots: saved })
  trail = []
}

/** A figure on a screen needs no more than a thousandth of a kelvin. */
const milli = (x: number): number => Math.round(x * 1000) / 1000

/** A lead time is reckoned anew once a minute of data time: it costs more than all else shown. */
const leadEvery_ms = 60_000
const leads = new Map<number, { at_ms: number; lead_h: ReturnType<typeof poisedIn_h> }>()
const leadOf = (state: GroupState, index: number, now_ms: number) => {
  const known = leads.get(index)
  if (known !== undefined && now_ms - known.at_ms < leadEvery_ms) return known.lead_h
  const lead_h = poisedIn_h(state, index, plan, now_ms)
  leads.set(index, { at_ms: now_ms, lead_h })
  return lead_h
}

/** Is a forecast drawn: at risk, or on its way to its line within the hour? */
const nearsItsLine = ({ standing, crossing }: Judgement): boolean =>
  standing === 'Near' ||
  standing === 'Below' ||
  standing === 'Poised' ||
  (crossing.below_h !== null && crossing.below_h[0] < 1)

const judgedAt = (index: number, now_ms: number): Judged | null => {
  const item = plan.items[index]
  const group = item === undefined ? null : plan.groupOfItem(item.id)
  const state = group === null ? undefined : states.get(group.id)
  if (item === undefined || group === null || state === undefined || parked.has(group.id))
    return null
  const judgement = judgementOf(state, index, plan, now_ms)
  if (judgement === null) return null
  const { since_ms, announcedTurned_ms, track } = history.at(index)
  const margin = nearsItsLine(judgement)
    ? outlookOf(state, index, plan, now_ms, forecast_h).margin
    : []
  return {
    judgement,
    since_ms,
    announcedTurned_ms,
    track,
    forecast: margin.map(
      ([t_ms, ...fan]): Fan => [t_ms, milli(fan[0]), milli(fan[1]), milli(fan[2])],
    ),
    tints_K: tintsOf(plan, index, now_ms),
    poisedIn_h: judgement.standing === 'Below' ? leadOf(state, index, now_ms) : null,
  }
}

/** Timers due by now fire; what has news, and some of the rest, is made anew for the screen. */
const tick = (now_ms: number): void => {
  for (const group of plan.groups) stepped(group, { kind: 'clock', now_ms })
  for (const group of [...late]) {
    late.delete(group)
    stepped(group, 'anew')
  }
  const rest = Math.min(shownPerTick, plan.items.length)
  for (let i = 0; i < rest; i++) news.add((next + i) % plan.items.length)
  next = (next + rest) % Math.max(1, plan.items.length)
  const items: Judged[] = []
  const estimates: Estimate[] = []
  const from_ms = performance.now()
  for (const index of news) {
    if (performance.now() - from_ms > showFor_ms) break
    news.delete(index)
    const judged = judgedAt(index, now_ms)
    if (judged === null) continue
    const estimate = history.shown(index, judged.judgement)
    if (estimate !== null) estimates.push(estimate)
    items.push(judged)
  }
  if (items.length > 0) post({ kind: 'judged', items })
  save(estimates, Date.now())
}

const answerTo = ({ item, what, now_ms }: Extract<ToWatch, { kind: 'ask' }>) => {
  const index = plan.itemIndex(item)
  const group = index < 0 ? null : plan.groupOfItem(item)
  const state = group === null ? undefined : states.get(group.id)
  if (state === undefined) return null
  return what === 'curves'
    ? curvesOf(state, index, plan, now_ms)
    : outlookOf(state, index, plan, now_ms, sheet_h)
}

restore()
catchUp(Number.MAX_SAFE_INTEGER)
for (const group of plan.groups) {
  if (!states.has(group.id)) states.set(group.id, freshState(plan, group))
}
tick(start.now_ms)
post({ kind: 'ready', offset })

port.on('message', (message: ToWatch) => {
  switch (message.kind) {
    case 'readings': {
      if (message.after > offset) catchUp(message.after)
      const fresh = message.readings.filter((r) => r.offset > offset)
      feed(fresh)
      offset = fresh.reduce((most, r) => Math.max(most, r.offset), offset)
      return post({ kind: 'done', offset })
    }
    case 'tick':
      if (message.upTo > offset) catchUp(message.upTo)
      return tick(message.now_ms)
    case 'ask':
      return post({ kind: 'answer', id: message.id, value: answerTo(message) })
    case 'stop':
      savedAt_ms = 0
      save([], Date.now())
      reader.close()
      return port.close()
  }
})
