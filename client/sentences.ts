import type { ItemView, Snapshot } from '../config/schema/api.js'
import { celsius, chance, hours, marginInterval, num, when } from './format.js'
import type { Entry, Lead, NeedyItem } from './hands.js'
import {
  isAsIntended,
  isWithdrawn,
  marginU_K,
  shortPlace,
  shownStanding,
  turnedAt_ms,
} from './shown.js'
import { say } from './words.js'

type Site = Snapshot['site']
export type At = { readonly now_ms: number; readonly zone: string }

/** The one word of the verdict, with what changes its meaning. */
export const standingWords = (item: ItemView): string => {
  const word = say(`standing.${shownStanding(item)}`)
  if (isWithdrawn(item)) return say('standing.withdrawn', { standing: word })
  return isAsIntended(item) ? say('standing.intended', { standing: word }) : word
}

/** `Adsorbed vaccine, 3 mL × 120` */
export const nameAndCount = (item: ItemView): string =>
  item.count > 1
    ? say('item.times', { name: item.productName, count: String(item.count) })
    : item.productName

export const leadWords = (lead: Lead): string => {
  switch (lead.kind) {
    case 'now':
      return say('lead.now')
    case 'below':
      return say('lead.below')
    case 'atLine':
      return say('lead.atLine')
    case 'within':
      return hours(lead.h[0], lead.h[2])
    case 'unknown':
      return say('lead.unknown')
  }
}

/** The margin as an interval with its unit; a dash where nothing is known. */
export const marginWords = (item: ItemView): string => {
  const { margin_K } = item.verdict
  const u_K = marginU_K(item)
  if (margin_K === null) return '–'
  return u_K === null ? `${num(margin_K)} K` : `${marginInterval(margin_K, u_K)} K`
}

/** What the right end of an item's row says: the figure that matters for its need. */
export const rowFigure = ({ item, need, lead }: NeedyItem, at: At): string => {
  if (need === 'turned') {
    const t = turnedAt_ms(item)
    return t === null
      ? say('row.turned')
      : say('row.turnedAt', { time: when(t, at.now_ms, at.zone) })
  }
  if (need === 'silent') return say('row.since', { time: when(item.since_ms, at.now_ms, at.zone) })
  if (need === 'reaching') return leadWords(lead)
  return marginWords(item)
}

const placeOf = (item: ItemView): string => shortPlace(item.position)

const turnedHeadline = (first: ItemView, count: number): string => {
  if (isWithdrawn(first)) return say('hands.withdrawn', { name: first.productName })
  const key = first.verdict.turned.reckoned ? 'hands.turnedReckoned' : 'hands.turned'
  return say(key, { count, name: first.productName, place: first.position })
}

/** What is happening, as one sentence. */
export const headline = (entry: Entry, at: At): string => {
  const first = entry.items[0]?.item
  if (first === undefined) return ''
  const same = entry.items.filter((n) => n.need === entry.need)
  const values = { count: same.length, name: first.productName, place: first.position }
  if (entry.cause === 'warming') return say('hands.warming', values)
  switch (entry.need) {
    case 'turned':
      return turnedHeadline(first, same.length)
    case 'poised':
      return say('hands.poised', values)
    case 'below':
      return say('hands.below', values)
    case 'reaching':
      return say(entry.lead.kind === 'atLine' ? 'hands.atLine' : 'hands.reaching', values)
    case 'silent':
      return say('hands.silent', { ...values, time: when(first.since_ms, at.now_ms, at.zone) })
  }
}

const leftSentence = ({ item, need, lead }: NeedyItem, site: Site): string | null => {
  const place = placeOf(item)
  if (need === 'poised' || need === 'below') {
    if (need === 'below' && lead.kind === 'within')
      return say('left.poised', { place, lead: leadWords(lead) })
    const held = item.verdict.chance
    return held === null
      ? null
      : say('left.chance', {
          place,
          count: item.count,
          hours: num(site.policy.poisedHorizon_h, 0),
          chance: chance(held.low, held.high),
        })
  }
  if (need === 'reaching')
    return lead.kind === 'within' ? say('left.line', { place, lead: leadWords(lead) }) : null
  if (need === 'turned' && item.verdict.phase === 'freezing') {
    const solid = item.verdict.ifItFreezes?.solid_h ?? null
    return solid === null ? null : say('left.solid', { place, lead: hours(solid[0], solid[2]) })
  }
  return null
}

/**
 * What happens where nobody acts, in the order of the entry's items.
 *
 * @param atMost  sentences; more than two would not be read
 */
export const ifLeft = (entry: Entry, site: Site, atMost: number): string =>
  entry.items
    .map((needy) => leftSentence(needy, site))
    .filter((text) => text !== null)
    .slice(0, atMost)
    .map((text) => text.charAt(0).toUpperCase() + text.slice(1))
    .join(' ')

/** What is read at a glance is short; the Item sheet has every reason. */
const reasonsAtMost_characters = 150

/** The first reason of the most pressing item, and the second where both are short. */
export const reasons = (entry: Entry): string => {
  const [first = '', second] = entry.items[0]?.item.verdict.why ?? []
  const both = second === undefined ? first : `${first} ${second}`
  return both.length <= reasonsAtMost_characters ? both : first
}

/** What a lane's link is called, for who hears the page. */
export const laneLabel = (item: ItemView): string =>
  say('lane.label', {
    unit: item.storageUnit,
    place: item.position,
    name: nameAndCount(item),
    standing: standingWords(item),
    margin: marginWords(item),
  })

/** One line about an item, for the pointer and the keyboard. */
export const readout = (item: ItemView, at: At): string =>
  [
    `${item.storageUnit} ${shortPlace(item.position)}`,
    nameAndCount(item),
    standingWords(item),
    marginWords(item),
    item.verdict.temperature_C === null ? null : celsius(item.verdict.temperature_C),
    say(`evidence.${item.verdict.evidence}`),
    say('row.since', { time: when(item.since_ms, at.now_ms, at.zone) }),
  ]
    .filter((text) => text !== null)
    .join(' · ')
