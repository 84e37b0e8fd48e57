import { readFileSync } from 'node:fs'
import { createServer } from 'node:http'
import type { AddressInfo } from 'node:net'
import { join } from 'node:path'
import { pino } from 'pino'
import { projectRoot, readLibrary } from '../config/library/read.js'
import type { Intake, SiteView } from '../config/schema/api.js'
import { inForce } from '../config/schema/inForce.js'
import { parse } from '../config/schema/parse.js'
import { siteRefusals } from '../config/schema/readSite.js'
import { Refusal } from '../config/schema/refusal.js'
import { SiteFile } from '../config/schema/site.js'
import { type Judgement, modelVersion } from '../config/schema/verdict.js'
import { wordsOf } from '../config/words/read.js'
import { apiApp, isLoopbackHost } from './api/app.js'
import { itemReadings, itemTrail, refusedView } from './api/items.js'
import { boardOf } from './board.js'
import { decode } from './decode/decode.js'
import { mappingProblems, mappingsOf } from './decode/mappings.js'
import { bindStore, openDemo } from './demo.js'
import { liveFeed } from './live/feed.js'
import { openLog, type SqliteLog } from './log/sqliteLog.js'
import { openBroker } from './mqtt/broker.js'
import type { Receive } from './mqtt/message.js'
import { listenTo, type OutsideStatus } from './mqtt/outside.js'
import { partOf } from './seam.js'
import type { Settings } from './settings.js'
import { siteClock } from './siteClock.js'
import { verdictOf } from './watch/explain.js'
import { planOf } from './watch/plan.js'
import { startWatch } from './watcher.js'
import type { FromWatch } from './watching.js'

/** How often the watch is told the time; half of it is the most that a change waits for its push. */
const tick_ms = 250

/** Verdict changes held while the disk is away; a restart finds them again from the log. */
const mostUnsaved = 10_000

export type Program = {
  /** Address of the pages: http://127.0.0.1:8080 */
  readonly http: string
  /** Address of the embedded broker, null when it is off. */
  readonly mqtt: string | null
  stop(): Promise<void>
}

/**
 * A site file from disk.
 *
 * @throws Refusal naming the first wrong field; all of them stand in its problem
 */
export const siteFrom = (file: string): SiteFile => {
  let json: unknown
  try {
    json = JSON.parse(readFileSync(file, 'utf8'))
  } catch (error) {
    const cause = error instanceof Error ? error.message : String(error)
    throw new Refusal(
      'unreadable',
      'site',
      file,
      `it cannot be read as JSON (${cause})`,
      'give the path of a hoarline-site/1 file',
      { cause: error },
    )
  }
  const refusals = siteRefusals(json)
  const site = refusals.length === 0 ? parse(SiteFile, json) : null
  const all = site === null ? refusals : mappingProblems(site)
  if (site === null || all.length > 0)
    throw new Refusal(
      'site-file',
      'site',
      file,
      `${all.length} of its fields will not do:\n${all.map((r) => `  ${r.message}`).join('\n')}\n`,
      'correct them and start again',
    )
  return site
}

/** A name for outside brokers that stays ours over restarts: the broker's queue for us hangs on it. */
const clientIdOf = async (log: SqliteLog, broker: string): Promise<string> => {
  const key = `client id ${broker}`
  const kept = log.reader.meta(key)
  if (kept !== null) return kept
  const made = `hoarline-${broker}-${crypto.randomUUID().slice(0, 8)}`
  await log.apply({ meta: { [key]: made } })
  return made
}

/**
 * Everything, joined: settings → site → store → watch → ways in → pages. The only place that
 * knows all rooms.
 *
 * @throws Refusal when a setting, the site file, a port or the folder will not do
 */
export const startProgram = async (settings: Settings): Promise<Program> => {
  const root = projectRoot()
  const logger = pino({ level: settings.log, base: null }, pino.destination(2))
  const say = wordsOf('en')
  const library = readLibrary()
  const onDemo = settings.site === null
  const written = siteFrom(settings.site ?? join(root, 'config', 'demo', 'site.json'))
  const undo: (() => Promise<void> | void)[] = []
  const stop = async () => {
    for (const step of undo.splice(0).reverse()) await step()
  }

  try {
    const log = await openLog({
      data: settings.data,
      onOutage: (outage) =>
        outage === null
          ? logger.info('the disk takes readings again')
          : logger.error(
              { cause: outage.message },
              'the disk takes no more: nothing is acknowledged until it does',
            ),
    })
    undo.push(() => log.close())

    await bindStore(log, onDemo ? 'practice' : 'real', settings.data)
    const demo = onDemo ? await openDemo(log, written, library.solutes, logger) : null
    const site = demo?.site ?? written
    const plan = planOf(site, library)
    const clock = siteClock(demo?.clockMap ?? null)
    const brokers = new Map<string, OutsideStatus>()
    const mappings = mappingsOf(site)
    /** Receipt times of readings on their way through the watch, oldest first. */
    const onTheWay: { offset: number; receivedAt_ms: number }[] = []
    /** Verdict changes that the disk would not take; estimates and states come anew by themselves. */
    let unsaved: readonly Judgement[] = []
    const notEvaluated = new Set<string>()

    /** Wall seconds since the oldest reading that is not judged yet was received; 0 when all are. */
    const behind_s = (): number => {
      const oldest = onTheWay[0]
      if (oldest === undefined) return 0
      const speed = clock.map()?.speed ?? 1
      return Math.max(0.1, Math.round((clock.now_ms() - oldest.receivedAt_ms) / speed / 100) / 10)
    }
    const intake = (): Intake => {
      const { readings, duplicates, conflicts, refused, bad } = log.counts()
      const away = [...brokers.values()].find((b) => b.why !== null)
      return {
        readings,
        duplicates,
        conflicts,
        refused,
        bad,
        outage: log.outage()?.message ?? away?.why ?? null,
        behind_s: behind_s(),
        notEvaluated: [...notEvaluated],
      }
    }
    let mqttAddress: string | null = null
    const siteView = (): SiteView => {
      const policy = inForce(site.policy, clock.now_ms())
      return {
        id: site.site.id,
        name: site.site.name,
        zone: site.site.zone,
        now_ms: clock.now_ms(),
        speed: clock.map()?.speed ?? 1,
        practice: onDemo,
        tryProbe:
          demo?.tryProbe == null || mqttAddress === null
            ? null
            : { ...demo.tryProbe, mqtt: mqttAddress },
        policy: {
          poisedChance: policy.poisedChance,
          poisedHorizon_h: policy.poisedHorizon_h,
          chanceQuantile: policy.chanceQuantile,
          lead_min: policy.lead_min,
        },
        model: modelVersion,
      }
    }
    const board = boardOf(site, { siteView, intake, verdict: (j) => verdictOf(j, say) })

    const save = async (found: Extract<FromWatch, { kind: 'save' }>) => {
      const trail = [...unsaved, ...found.trail]
      unsaved = []
      try {
        await log.apply({ trail, estimates: found.estimates, snapshots: found.snapshots })
      } catch (error) {
        unsaved = [...trail, ...unsaved].slice(-mostUnsaved)
        logger.warn({ err: error }, 'what the watch found is not saved yet')
      }
    }
    const onWatch = (message: FromWatch) => {
      if (message.kind === 'judged') board.judged(message.items)
      else if (message.kind === 'save') void save(message)
      else if (message.kind === 'done')
        while (onTheWay[0] !== undefined && onTheWay[0].offset <= message.offset) onTheWay.shift()
      else if (message.kind === 'parked') {
        for (const item of message.items) notEvaluated.add(item)
        logger.error({ cause: message.cause, items: message.items }, 'not evaluated')
      }
    }
    const watch = await startWatch({ site, data: settings.data, now_ms: clock.now_ms() }, onWatch)
    undo.push(() => watch.stop())
    board.recall(log.reader, clock.now_ms())

    const receive: Receive = async ({ topic, payload, retain, broker }) => {
      const receivedAt_ms = clock.now_ms()
      const { readings, refused } = decode(
        { topic, payload, retain, receivedAt_ms, broker },
        mappings,
      )
      const logged = await log.append(
        readings.map((reading) => ({
          part: partOf(plan.groupOfProbe(reading.probe)?.id ?? reading.probe),
          reading,
        })),
        refused,
      )
      const offset = logged.reduce(
        (most, r) => Math.max(most, r.kept === 'duplicate' ? 0 : r.offset),
        0,
      )
      const last = onTheWay.at(-1)
      if (offset > 0 && (last === undefined || receivedAt_ms - last.receivedAt_ms >= tick_ms))
        onTheWay.push({ offset, receivedAt_ms })
      board.hear(logged)
      watch.hear(logged)
    }

    if (settings.mqttPort !== null) {
      const embedded = await openBroker({
        host: settings.host,
        port: settings.mqttPort,
        receive,
        onFault: (error) => logger.warn({ err: error }, 'a message was not acknowledged'),
      })
      undo.push(() => embedded.close())
      mqttAddress = `mqtt://${settings.host}:${embedded.port}`
    }
    for (const broker of settings.brokers) {
      const key = `subscribed ${broker.name}`
      const outside = listenTo({
        ...broker,
        clientId: await clientIdOf(log, broker.name),
        filters: mappings.filters(broker.name),
        subscribed: JSON.parse(log.reader.meta(key) ?? '[]') as string[],
        onSubscribed: (filters) =>
          void log
            .apply({ meta: { [key]: JSON.stringify(filters) } })
            .catch((error) => logger.warn({ err: error }, 'a subscription is not saved')),
        receive,
        onStatus: (status) => {
          brokers.set(status.name, status)
          logger.info(
            { broker: status.name, state: status.state, why: status.why },
            'outside broker',
          )
        },
      })
      undo.push(() => outside.close())
    }

    const app = apiApp(
      {
        snapshot: board.snapshot,
        readings: (item, span) =>
          itemReadings({ site, reader: log.reader, watch, now_ms: clock.now_ms }, item, span),
        trail: (item) => itemTrail({ site, reader: log.reader, say }, item),
        curves: async (item) => {
          const curves = await watch.curves(item, clock.now_ms())
          if (curves === null)
            throw new Refusal(
              'not-found',
              'id',
              item,
              'there is no such stored item',
              'take an id from /api/v1/items',
            )
          return curves
        },
        cautions: () => library.cautions,
        refused: (limit) => log.reader.refused(limit).map(refusedView),
        setSpeed:
          demo === null
            ? null
            : (speed) => {
                clock.setSpeed(speed)
              },
        health: () => {
          const { outage } = intake()
          return { live: true, ready: outage === null, outage, behind_s: behind_s() }
        },
      },
      join(root, 'dist', 'client'),
      logger,
    )
    const server = createServer(app)
    const feed = liveFeed(
      server,
      board.batch,
      (host, origin) =>
        isLoopbackHost(host) && (origin === undefined || origin === `http://${host}`),
    )
    await new Promise<void>((resolve, reject) => {
      server.once('error', (error: NodeJS.ErrnoException) =>
        reject(
          error.code === 'EADDRINUSE'
            ? new Refusal(
                'port-in-use',
                'HOARLINE_PORT',
                settings.port,
                'another program listens on this port',
                'give another with --port, or 0 for a free one',
                { cause: error },
              )
            : error,
        ),
      )
      server.listen(settings.port, settings.host, resolve)
    })
    undo.push(() => feed.close())
    const timer = setInterval(() => watch.tick(clock.now_ms()), tick_ms)
    undo.push(() => clearInterval(timer))

    if (demo !== null && mqttAddress !== null) undo.push(demo.start(mqttAddress, clock))

    const { port } = server.address() as AddressInfo
    return { http: `http://${settings.host}:${port}`, mqtt: mqttAddress, stop }
  } catch (error) {
    await stop()
    throw error
  }
}
