import type {
  Changed,
  Fan,
  Intake,
  ItemView,
  ProbeView,
  SiteView,
  Snapshot,
  StorageUnitView,
} from '../config/schema/api.js'
import { everyValue, inForce } from '../config/schema/inForce.js'
import type { Item, Probe, SiteFile } from '../config/schema/site.js'
import type { Judgement, Verdict } from '../config/schema/verdict.js'
import type { LoggedReading } from './seam.js'
import type { Reader } from './store/reader.js'

/** What the watch says of one item, ready to be shown. */
export type Judged = {
  readonly judgement: Judgement
  /** Data time since which the standing has been this. */
  readonly since_ms: number
  /** When a turn was announced and not withdrawn by a person; null when there was none. */
  readonly announcedTurned_ms: number | null
  readonly track: readonly (readonly [number, number])[]
  readonly forecast: readonly Fan[]
  readonly tints_K: ItemView['tints_K']
  /** Hours until it becomes Poised; null where it is not Below or not on its way there. */
  readonly poisedIn_h: readonly [number, number, number] | null
}

/** A probe not heard for longer than this counts as never heard, on the Probes page. */
const recalled_ms = 7 * 86_400_000
const recalledPoints = 40

type Heard = { reading: LoggedReading; trusted: LoggedReading | null }

/** Where an item is at an instant: its last move until then. */
export const placeOf = (item: Item, t_ms: number): { storageUnit: string; position: string } =>
  item.moves.findLast((m) => Date.parse(m.at) <= t_ms) ?? item

const isStored = (item: Item, t_ms: number): boolean =>
  Date.parse(item.placedAt) <= t_ms &&
  (item.removedAt === null || Date.parse(item.removedAt) > t_ms)

/**
 * The main thread's picture of the site: the newest verdicts, what was heard from each probe, and
 * the counts of the intake. It decides nothing; the watch does.
 */
export const boardOf = (
  site: SiteFile,
  give: {
    siteView(): SiteView
    intake(): Intake
    verdict(judgement: Judgement): Verdict
  },
) => {
  const judged = new Map<string, Judged>()
  const heard = new Map<string, Heard>()
  const dirty = new Set<string>()
  let seq = 0
  let asOf_ms = 0
  let last = ''

  const assignments = new Map(
    site.probes.map((p) => [
      p.id,
      site.assignments
        .filter((a) => a.probe === p.id)
        .map((a) => ({
          to: a.to,
          from_ms: Date.parse(a.from),
          until_ms: a.until === null ? Number.POSITIVE_INFINITY : Date.parse(a.until),
        })),
    ]),
  )
  const assignmentOf = (probe: Probe, t_ms: number) =>
    (assignments.get(probe.id) ?? []).findLast((a) => a.from_ms <= t_ms && a.until_ms > t_ms)?.to ??
    null
  const airProbes = site.probes.filter((p) => p.placement === 'in-air')
  const productsOf = new Map(site.products.map((p) => [everyValue(p)[0]?.id, p]))
  const containersOf = new Map(site.containers.map((c) => [everyValue(c)[0]?.id, c]))
  const itemsById = new Map(site.items.map((i) => [i.id as string, i]))

  const probeView = (probe: Probe, now_ms: number): ProbeView => {
    const last = heard.get(probe.id)
    const policy = inForce(site.policy, now_ms)
    const to = assignmentOf(probe, now_ms)
    const trusted_ms = last?.trusted?.t_ms ?? null
    const calibration = probe.calibration === undefined ? null : inForce(probe.calibration, now_ms)
    const source = probe.source
    return {
      id: probe.id,
      placement: probe.placement,
      interval_s: probe.interval_s,
      at: to === null ? null : 'item' in to ? to.item : to.storageUnit,
      heard_ms: last?.reading.t_ms ?? null,
      trusted_ms,
      reading_C: last?.reading.celsius ?? null,
      quality: last?.reading.quality ?? null,
      silent:
        trusted_ms === null ||
        now_ms - trusted_ms >= policy.silentAfter_intervals * probe.interval_s * 1000,
      calibrationDue_ms: calibration?.due === undefined ? null : Date.parse(calibration.due),
      topic: source === undefined || source.payload === 'sparkplug' ? null : source.topic,
    }
  }

  const unitViews = (now_ms: number): StorageUnitView[] =>
    site.storageUnits.map((given) => {
      const unit = inForce(given, now_ms)
      const air = airProbes
        .filter((p) => {
          const to = assignmentOf(p, now_ms)
          return to !== null && 'storageUnit' in to && to.storageUnit === unit.id
        })
        .map((p) => ({ probe: p, trusted: heard.get(p.id)?.trusted ?? null }))
        .filter((x) => x.trusted !== null)
        .sort((a, b) => (b.trusted?.t_ms ?? 0) - (a.trusted?.t_ms ?? 0))[0]
      const offset_K =
        air?.probe.calibration === undefined ? 0 : inForce(air.probe.calibration, now_ms).offset_K
      const read_C = air?.trusted?.celsius ?? null
      return {
        id: unit.id,
        name: unit.name ?? unit.id,
        kind: unit.kind,
        air_C: read_C === null ? null : read_C + offset_K,
        airAt_ms: air?.trusted?.t_ms ?? null,
        windows: site.windows
          .filter((w) => w.storageUnit === unit.id)
          .map((w) => ({
            kind: w.kind,
            from_ms: Date.parse(w.from),
            until_ms: Date.parse(w.until),
          }))
          .filter((w) => w.until_ms > now_ms - 86_400_000 && w.from_ms < now_ms + 86_400_000),
      }
    })

  const itemView = (item: Item, now_ms: number): ItemView | null => {
    const known = judged.get(item.id)
    if (known === undefined || !isStored(item, now_ms)) return null
    const givenProduct = productsOf.get(item.product)
    const givenContainer = containersOf.get(item.container)
    if (givenProduct === undefined || givenContainer === undefined) return null
    const product = inForce(givenProduct, now_ms)
    const container = inForce(givenContainer, now_ms)
    const place = placeOf(item, now_ms)
    return {
      id: item.id,
      productName: item.name ?? product.name,
      productId: product.id,
      containerName: container.name ?? container.id,
      fill_kg: container.fill_kg,
      count: item.count,
      lot: item.lot,
      storageUnit: place.storageUnit,
      position: place.position,
      harm: product.harm,
      label_C: product.label_C ?? null,
      verdict: give.verdict(known.judgement),
      since_ms: known.since_ms,
      announcedTurned_ms: known.announcedTurned_ms,
      track: known.track,
      forecast: known.forecast,
      tints_K: known.tints_K,
      poisedIn_h: known.poisedIn_h === null ? null : [...known.poisedIn_h],
    }
  }

  const views = (now_ms: number, items: Iterable<Item | undefined>): ItemView[] =>
    [...items].map((i) => (i === undefined ? null : itemView(i, now_ms))).filter((v) => v !== null)

  const hear = (readings: readonly LoggedReading[]): void => {
    for (const reading of readings) {
      if (reading.kept === 'duplicate') continue
      const last = heard.get(reading.probe)
      const good = reading.quality === 'good' || reading.quality === 'late entry'
      const trusted = good ? reading : null
      const newest = <T extends LoggedReading | null>(a: T, b: T): T =>
        a === null ? b : b === null || a.t_ms >= b.t_ms ? a : b
      heard.set(reading.probe, {
        reading: last === undefined ? reading : newest(reading, last.reading),
        trusted: newest(trusted, last?.trusted ?? null),
      })
      asOf_ms = Math.max(asOf_ms, reading.t_ms)
    }
  }

  return {
    /** Readings that are on disk now. */
    hear,

    /** What was last heard of each probe before this start. */
    recall(reader: Reader, now_ms: number): void {
      for (const probe of site.probes) {
        const points = reader.points(probe.id, now_ms - recalled_ms, null, recalledPoints)
        hear(
          points.map(([t_ms, celsius, quality]) => ({
            probe: probe.id,
            t_ms,
            receivedAt_ms: t_ms,
            celsius,
            seq: -1,
            quality,
            timeSource: 'device',
            offset: 0,
            part: 0,
            kept: 'new',
          })),
        )
      }
    },

    /** What the watch found. */
    judged(items: readonly Judged[]): void {
      for (const item of items) {
        judged.set(item.judgement.item, item)
        dirty.add(item.judgement.item)
        asOf_ms = Math.max(asOf_ms, item.judgement.t_ms)
      }
    },

    snapshot(): Snapshot {
      const view = give.siteView()
      return {
        seq,
        asOf_ms,
        site: view,
        storageUnits: unitViews(view.now_ms),
        items: views(view.now_ms, site.items),
        probes: site.probes.map((p) => probeView(p, view.now_ms)),
        intake: give.intake(),
      }
    },

    /** What is newer than the last batch; null when nothing is. */
    batch(): Changed | null {
      const view = give.siteView()
      const probes = site.probes.map((p) => probeView(p, view.now_ms))
      const storageUnits = unitViews(view.now_ms)
      const intake = give.intake()
      const rest = JSON.stringify([probes, storageUnits, intake, view.speed])
      if (dirty.size === 0 && rest === last) return null
      last = rest
      seq += 1
      const items = views(
        view.now_ms,
        [...dirty].map((id) => itemsById.get(id)),
      )
      dirty.clear()
      return {
        seq,
        asOf_ms,
        now_ms: view.now_ms,
        speed: view.speed,
        items,
        storageUnits,
        probes,
        intake,
      }
    },
  }
}
