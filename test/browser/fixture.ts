import { readFileSync } from 'node:fs'
import { createServer } from 'node:http'
import type { AddressInfo } from 'node:net'
import { join } from 'node:path'
import type {
  CautionRow,
  Changed,
  Intake,
  ItemView,
  ProbeView,
  RefusedView,
  SiteView,
  Snapshot,
  StorageUnitView,
} from '../../config/schema/api.js'
import type { StorageUnitId } from '../../config/schema/site.js'
import { apiApp } from '../../server/api/app.js'
import { liveFeed } from '../../server/live/feed.js'
import { curves, probeView, readingsOf, trailOf, unitView } from './fixtureReadings.js'
import { probes, units } from './fixtureSite.js'
import { everything, minute_ms, start_ms, viewOf, zone } from './fixtureWatch.js'
import { rootFolder } from './root.js'

const refused: readonly RefusedView[] = [
  {
    receivedAt_ms: start_ms - 5 * minute_ms,
    topic: 'tarnfield/cr-2/a-07',
    payload: '[{"n":"temp","u":"Far","v":24.1}]',
    code: 'unknown-unit',
    field: '[0].u',
    value: 'Far',
    problem: 'SenML has no such unit of temperature',
    remedy: 'send "Cel"; a probe that counts in °F needs unit "degF" in the site file',
  },
  {
    receivedAt_ms: start_ms - 41 * minute_ms,
    topic: 'tarnfield/nowhere/x1',
    payload: '4.2',
    code: 'unknown-topic',
    field: 'topic',
    value: 'tarnfield/nowhere/x1',
    problem: 'no probe of the site file has this topic',
    remedy: 'give a probe this source, or correct the topic at the sender',
  },
]

const cautionTable = (): CautionRow[] =>
  JSON.parse(
    readFileSync(join(rootFolder(), 'config', 'library', 'cautions.json'), 'utf8'),
  ) as CautionRow[]

export type FixtureOptions = {
  /** As many copies of the site as these, for measuring. */
  readonly copies?: number
  readonly practice?: boolean
  /** Only items that ask for nobody. */
  readonly calm?: boolean
  readonly outage?: string | null
}

/** Any item again under another name, in a storage unit of its copy's number. */
const copied = (item: ItemView, copy: number): ItemView =>
  copy === 0
    ? item
    : { ...item, id: `${item.id}-${copy}`, storageUnit: `${item.storageUnit}/${copy}` }

export type Fixture = {
  readonly url: string
  /** Moves the site's clock on and tells every page, as the watch would. */
  advance(minutes: number): void
  /** Sends a batch that leaves out a number: the page must fetch again. */
  skip(): void
  /** How often the whole snapshot was asked for. */
  snapshots(): number
  /** Only these many items in each batch, so that a change rate can be set. */
  change(items: number): void
  close(): Promise<void>
}

/**
 * A server with made-up but sensible data, deterministic to the last digit, behind the program's own
 * routes, headers and feed.
 */
export const startFixture = async (options: FixtureOptions = {}): Promise<Fixture> => {
  const copies = options.copies ?? 1
  let t = 0
  let seq = 0
  let asked = 0
  let speed = 1
  let waiting: Changed | null = null

  const site = (): SiteView => ({
    id: 'tarnfield',
    name: 'Tarnfield Depot',
    zone,
    // A little after the newest figure, as it always is.
    now_ms: start_ms + t * minute_ms + 6_000,
    speed,
    practice: options.practice ?? true,
    tryProbe: {
      topic: 'tarnfield/try/p-99',
      name: 'urn:dev:mac:0024befffe804ff1:temp',
      mqtt: 'mqtt://127.0.0.1:1883',
      item: 'CR-3 shelf A1',
    },
    policy: { poisedChance: 0.05, poisedHorizon_h: 8, chanceQuantile: 'high', lead_min: 30 },
    model: '0.1.0',
  })
  const intake = (): Intake => ({
    readings: 48_210 + Math.round(t * 29),
    duplicates: 12,
    conflicts: 1,
    refused: refused.length,
    bad: 7,
    outage: options.outage ?? null,
    behind_s: 0,
    notEvaluated: [],
  })
  const shown = everything.filter(
    (k) => options.calm !== true || k.unit.id === 'CR-1' || k.unit.id === 'FZ-1',
  )
  const items = (): ItemView[] => {
    const once = shown.map((k) => viewOf(k, t))
    return Array.from({ length: copies }, (_, copy) => once.map((i) => copied(i, copy))).flat()
  }
  const unitViews = (): StorageUnitView[] =>
    Array.from({ length: copies }, (_, copy) =>
      units.map((u) => {
        const view = unitView(u, t)
        return copy === 0 ? view : { ...view, id: `${view.id}/${copy}` as StorageUnitId }
      }),
    ).flat()
  const heard = (): ProbeView[] => probes.map((p) => probeView(p, t))
  const snapshot = (): Snapshot => ({
    seq,
    asOf_ms: start_ms + t * minute_ms,
    site: site(),
    storageUnits: unitViews(),
    items: items(),
    probes: heard(),
    intake: intake(),
  })
  const batch = (changed: readonly ItemView[]): Changed => {
    seq += 1
    const { now_ms } = site()
    return {
      seq,
      asOf_ms: start_ms + t * minute_ms,
      now_ms,
      speed,
      items: changed,
      storageUnits: unitViews(),
      probes: heard(),
      intake: intake(),
    }
  }

  const app = apiApp(
    {
      snapshot: () => {
        asked += 1
        return snapshot()
      },
      readings: async (id, span) => readingsOf(id, t, span),
      trail: (id) => trailOf(id, t),
      curves: async (id) => curves(id, t),
      cautions: cautionTable,
      refused: () => refused,
      setSpeed: (wanted) => {
        speed = wanted
        waiting = batch([])
      },
      health: () => ({ live: true, ready: true, outage: null, behind_s: 0 }),
    },
    join(rootFolder(), 'dist', 'client'),
    { error: (context, text) => console.error(text, context) },
  )
  const server = createServer(app)
  const take = (): Changed | null => {
    const next = waiting
    waiting = null
    return next
  }
  const feed = liveFeed(server, take, () => true)
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
  // The cast: a TCP server that listens has an address of this form.
  const { port } = server.address() as AddressInfo
  let all: ItemView[] | null = null
  let cursor = 0
  return {
    url: `http://127.0.0.1:${port}`,
    advance(minutes) {
      t += minutes
      waiting = batch(items())
    },
    skip() {
      seq += 1
      waiting = batch([])
    },
    snapshots: () => asked,
    change(count) {
      all ??= items()
      const from = all
      const some = Array.from({ length: Math.min(count, from.length) }, (_, i) => {
        const item = from[(cursor + i) % from.length]
        if (item === undefined) throw new Error('no items')
        const margin_K =
          item.verdict.margin_K === null ? null : item.verdict.margin_K + 0.3 * Math.sin(cursor + i)
        return { ...item, verdict: { ...item.verdict, margin_K } }
      })
      cursor += count
      waiting = batch(some)
    },
    async close() {
      await feed.close()
    },
  }
}
