import type { Logger } from 'pino'
import type { SiteView } from '../config/schema/api.js'
import { Refusal } from '../config/schema/refusal.js'
import type { SiteFile } from '../config/schema/site.js'
import { playLive } from '../sim/live.js'
import type { SimState } from '../sim/model.js'
import { scenarioOf } from '../sim/scenarios.js'
import { shifted } from '../sim/shift.js'
import { worldOf } from '../sim/world.js'
import type { SqliteLog } from './log/sqliteLog.js'
import type { SoluteTable } from './physics/solution.js'
import type { Clock } from './seam.js'
import type { ClockMap } from './siteClock.js'

/** Speed of the demo's clock on its first start. */
const usualSpeed = 60
/** State of the simulator and time of its clock are saved at this distance, wall ms. */
const saveEvery_ms = 5000
/** Names of what is kept in the store. */
const key = {
  kind: 'kind of site',
  start: 'demo start',
  clock: 'demo clock',
  state: 'demo state',
} as const

/**
 * Binds a store to practice or to real data for good: simulated readings are never stored among
 * real ones.
 *
 * @throws Refusal 'other-site' when the folder holds the other kind
 */
export const bindStore = async (
  log: SqliteLog,
  kind: 'practice' | 'real',
  folder: string,
): Promise<void> => {
  const kept = log.reader.meta(key.kind)
  if (kept === kind) return
  if (kept !== null)
    throw new Refusal(
      'other-site',
      'data',
      folder,
      `this folder holds ${kept} data, and practice data are never stored among real ones`,
      'give another folder with --data or HOARLINE_DATA',
    )
  await log.apply({ meta: { [key.kind]: kind } })
}

/** The demonstration site: its clock, its simulator, and the probe that is left to a visitor. */
export type DemoSite = {
  /** The site as it stands in the file, its times moved to the demo's start. */
  readonly site: SiteFile
  readonly clockMap: ClockMap
  /** Where a visitor may publish; without the address of the broker. */
  readonly tryProbe: Omit<NonNullable<SiteView['tryProbe']>, 'mqtt'> | null
  /** @returns stops it, its state saved */
  start(mqttUrl: string, clock: Clock & { map(): ClockMap | null }): () => Promise<void>
}

/**
 * Opens the demo, where it was left or anew.
 *
 * Its clock stands still while the program does: a stop is no gap. What is saved is a time a
 * little ahead of the clock, so that even after a kill it never runs back behind a stored receipt.
 */
export const openDemo = async (
  log: SqliteLog,
  written: SiteFile,
  solutes: SoluteTable,
  logger: Pick<Logger, 'warn'>,
  wall: () => number = Date.now,
): Promise<DemoSite> => {
  const scenario = scenarioOf('demo')
  const wall_ms = wall()
  const start_ms = Number(log.reader.meta(key.start) ?? wall_ms)
  await log.apply({ meta: { [key.start]: String(start_ms) } })
  const kept = log.reader.meta(key.clock)
  // Casts: what this program saved itself.
  const last = kept === null ? null : (JSON.parse(kept) as { site_ms: number; speed: number })
  const state = log.reader.meta(key.state)
  const clockMap = { wall_ms, site_ms: last?.site_ms ?? start_ms, speed: last?.speed ?? usualSpeed }
  const site = shifted(written, start_ms - Date.parse(scenario.start))
  const world = { ...worldOf(scenario, site, solutes, scenario.seed), start_ms }
  const probe = site.probes.find((p) => p.id === scenario.tryProbe)
  const to = site.assignments.find((a) => a.probe === probe?.id)?.to

  return {
    site,
    clockMap,
    tryProbe:
      probe?.source?.payload === 'senml' && to !== undefined && 'item' in to
        ? { topic: probe.source.topic, name: probe.source.name ?? '', item: to.item }
        : null,
    start(mqttUrl, clock) {
      let newest: SimState | null = null
      const save = async (ahead_ms: number) => {
        const map = clock.map()
        if (map === null) return
        const site_ms = clock.now_ms() + ahead_ms * map.speed
        await log
          .apply({
            meta: {
              [key.clock]: JSON.stringify({ site_ms, speed: map.speed }),
              ...(newest === null ? {} : { [key.state]: JSON.stringify(newest) }),
            },
          })
          .catch((error) => logger.warn({ err: error }, 'the demo is not saved yet'))
      }
      const demo = playLive({
        world,
        seed: scenario.seed,
        url: mqttUrl,
        saved: state === null ? null : (JSON.parse(state) as SimState),
        now_ms: () => clock.now_ms(),
        keep: (s) => {
          newest = s
        },
        onFault: (error) => logger.warn({ err: error }, 'the simulator'),
      })
      const timer = setInterval(() => void save(2 * saveEvery_ms), saveEvery_ms)
      void save(2 * saveEvery_ms)
      return async () => {
        clearInterval(timer)
        await demo.stop()
        await save(0)
      }
    },
  }
}
