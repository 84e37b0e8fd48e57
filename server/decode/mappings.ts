import { everyValue } from '../../config/schema/inForce.js'
import { Refusal } from '../../config/schema/refusal.js'
import type { Probe, SiteFile, Source } from '../../config/schema/site.js'

/** What decode knows of a probe. */
export type Known = {
  readonly probe: Probe
  /** Temperatures that the site file expects where it sits, °C; null where it says nothing. */
  readonly expected_C: readonly [number, number] | null
}

type OnTopic<P extends Source['payload']> = {
  readonly payload: P
  readonly entries: readonly (Known & { readonly source: Extract<Source, { payload: P }> })[]
}

/** Probes that one kind of payload on one topic may carry. */
export type Mapping = OnTopic<'senml'> | OnTopic<'json'> | OnTopic<'number'> | OnTopic<'sparkplug'>

/** The sources of a site's probes, compiled for look-up by topic. */
export type Mappings = {
  /** Topic filters to subscribe to at an outside broker. */
  filters(broker: string): readonly string[]
  /** Mappings for a message, the declared order kept. */
  of(topic: string, broker: string | null): readonly Mapping[]
}

/** The filter a sparkplug source listens to; all message types of its edge node. */
const sparkplugFilters = (s: Extract<Source, { payload: 'sparkplug' }>): string[] =>
  s.device === undefined
    ? [`spBv1.0/${s.group}/+/${s.edge}`]
    : [`spBv1.0/${s.group}/+/${s.edge}/${s.device}`]

const filtersOf = (source: Source): string[] =>
  source.payload === 'sparkplug' ? sparkplugFilters(source) : [source.topic]

/**
 * Whether a topic filter takes a topic [MQTT-4.7]: `+` one level, `#` all that follow and the
 * level above; neither takes a topic that begins with `$`.
 */
export const matches = (filter: string, topic: string): boolean => {
  const wanted = filter.split('/')
  const levels = topic.split('/')
  if (topic.startsWith('$') && /^[+#]/.test(filter)) return false // MQTT-4.7.2-1
  for (const [i, part] of wanted.entries()) {
    if (part === '#') return true
    if (i >= levels.length || (part !== '+' && part !== levels[i])) return false
  }
  return wanted.length === levels.length
}

/** Label ranges of what a probe serves and set points of where it sits: what a reading should be near. */
const expectedOf = (site: SiteFile, probe: Probe): readonly [number, number] | null => {
  const places = site.assignments.filter((a) => a.probe === probe.id).map((a) => a.to)
  const items = site.items.filter((item) =>
    places.some((to) =>
      'item' in to
        ? to.item === item.id
        : to.storageUnit === item.storageUnit ||
          item.moves.some((m) => m.storageUnit === to.storageUnit),
    ),
  )
  const labels = site.products
    .flatMap(everyValue)
    .filter((p) => items.some((item) => item.product === p.id))
    .flatMap((p) => (p.label_C === undefined ? [] : [...p.label_C]))
  const setPoints = site.storageUnits
    .flatMap(everyValue)
    .filter((u) => places.some((to) => 'storageUnit' in to && to.storageUnit === u.id))
    .flatMap((u) => (u.setPoint_C === undefined ? [] : [u.setPoint_C]))
  const all = [...labels, ...setPoints]
  return all.length === 0 ? null : [Math.min(...all), Math.max(...all)]
}

type Entry = Known & { readonly source: Source; readonly filter: string }

/** Entries of one filter, gathered by payload in the order of the site file. */
const gathered = (entries: readonly Entry[]): Mapping[] =>
  [...new Set(entries.map((e) => e.source.payload))].map(
    (payload) =>
      // The cast: all sources in it have this payload, which TypeScript cannot follow.
      ({ payload, entries: entries.filter((e) => e.source.payload === payload) }) as Mapping,
  )

/** The sources of a site's probes, compiled once per configuration. */
export const mappingsOf = (site: SiteFile): Mappings => {
  const entries = site.probes.flatMap((probe): Entry[] => {
    const { source } = probe
    if (source === undefined) return []
    const expected_C = expectedOf(site, probe)
    return filtersOf(source).map((filter) => ({ probe, source, filter, expected_C }))
  })
  const literal = new Map<string, Entry[]>()
  const wild: Entry[] = []
  for (const entry of entries) {
    if (/[+#]/.test(entry.filter)) wild.push(entry)
    else literal.set(entry.filter, [...(literal.get(entry.filter) ?? []), entry])
  }
  const hears = (entry: Entry, broker: string | null) =>
    entry.source.broker === undefined || entry.source.broker === broker

  // A site has a few hundred topics; anything beyond that many is not one of them.
  const seen = new Map<string, readonly Mapping[]>()
  const mostSeen = 20_000
  return {
    filters: (broker) => [...new Set(entries.filter((e) => hears(e, broker)).map((e) => e.filter))],
    of(topic, broker) {
      const key = `${broker ?? ''}\n${topic}`
      const known = seen.get(key)
      if (known !== undefined) return known
      const found = gathered(
        [...(literal.get(topic) ?? []), ...wild.filter((e) => matches(e.filter, topic))].filter(
          (e) => hears(e, broker),
        ),
      )
      if (found.length > 0 && seen.size < mostSeen) seen.set(key, found)
      return found
    },
  }
}

/**
 * Sources that cannot work as they are written, for a person to correct at start: two plain
 * numbers on one topic, two nameless probes in one SenML topic.
 */
export const mappingProblems = (site: SiteFile): Refusal[] =>
  site.probes.flatMap((probe, i) => {
    const { source } = probe
    if (source === undefined || source.payload === 'sparkplug' || source.payload === 'json')
      return []
    const alone = (s: Source) => s.payload === 'number' || (s.payload === 'senml' && !s.name)
    const twin = site.probes
      .slice(0, i)
      .find(
        ({ source: other }) =>
          other !== undefined &&
          other.payload === source.payload &&
          other.topic === source.topic &&
          other.broker === source.broker &&
          alone(other) &&
          alone(source),
      )
    return twin === undefined
      ? []
      : [
          new Refusal(
            'ambiguous-source',
            `probes[${i}].source`,
            source.topic,
            `probe "${twin.id}" already takes what this topic carries`,
            source.payload === 'number'
              ? 'give each probe a topic of its own: a plain number bears no name'
              : 'give each probe the `name` that its records bear',
          ),
        ]
  })
