import { useSignal } from '@preact/signals'
import type { CautionRow } from '../../config/schema/api.js'
import { clock } from '../format.js'
import { type Entry, type NeedyItem, notAssessable, withinUncertainty } from '../hands.js'
import { follow, itemPath } from '../route.js'
import { isPhone, isWall } from '../screen.js'
import {
  headline,
  ifLeft,
  leadWords,
  marginWords,
  nameAndCount,
  reasons,
  rowFigure,
  standingWords,
} from '../sentences.js'
import { markOf, shortPlace } from '../shown.js'
import { cautions, hands, now_ms, type Picture, picture, probesHeard, stale } from '../site.js'
import { say } from '../words.js'
import { DoDoNot } from './DoDoNot.js'
import { Chip, EvidenceMark, Mark } from './Marks.js'

/** Rows shown at once; the rest are one press away. On a phone what to do must still be in sight. */
const rowsAtFirst = { phone: 3, wall: 4, desk: 5 } as const

const Row = ({ needy, known }: { needy: NeedyItem; known: Picture }) => {
  const { item } = needy
  const at = { now_ms: now_ms.value, zone: known.site.zone }
  return (
    <li>
      <a class="needy" href={itemPath(item.id)} onClick={follow}>
        <Mark kind={markOf(item, known.site.policy)} size={24} />
        <span class="what">
          <b>{shortPlace(item.position)}</b> {nameAndCount(item)}
          <span class="unseen">, {standingWords(item)}</span>
        </span>
        <span class="figure">{rowFigure(needy, at)}</span>
        <EvidenceMark evidence={item.verdict.evidence} />
      </a>
    </li>
  )
}

const Rows = ({ entry, known }: { entry: Entry; known: Picture }) => {
  const all = useSignal(false)
  const shown = all.value
    ? entry.items
    : entry.items.slice(0, rowsAtFirst[isPhone.value ? 'phone' : isWall.value ? 'wall' : 'desk'])
  const hidden = entry.items.length - shown.length
  return (
    <>
      <ul class="its">
        {shown.map((needy) => (
          <Row key={needy.item.id} needy={needy} known={known} />
        ))}
      </ul>
      {hidden > 0 && (
        <button type="button" class="plain" onClick={() => (all.value = true)}>
          {say('hands.moreItems', { count: hidden })}
        </button>
      )}
    </>
  )
}

const rowsOf = (keys: readonly string[]): CautionRow[] =>
  keys.map((key) => cautions.value.get(key)).filter((row) => row !== undefined)

const Opened = ({ entry, known }: { entry: Entry; known: Picture }) => {
  const why = reasons(entry)
  const short = isPhone.value || isWall.value
  const left = ifLeft(entry, known.site, short ? 1 : 2)
  const texts = (
    <>
      {why !== '' && <p class="reasons">{why}</p>}
      {left !== '' && stale.value === null && (
        <p>
          <b>{say('hands.ifLeft')}</b> {left}
        </p>
      )}
    </>
  )
  // On a phone what to do and not to do stands before what may be read later.
  return (
    <>
      {!isPhone.value && texts}
      <Rows entry={entry} known={known} />
      <DoDoNot rows={rowsOf(entry.cautions)} after={isPhone.value && texts} />
    </>
  )
}

const Closed = ({ entry, known }: { entry: Entry; known: Picture }) => {
  const first = entry.items[0]?.item
  if (first === undefined) return null
  const others = entry.items.length - 1
  return (
    <p class="late">
      <Chip
        kind={markOf(first, known.site.policy)}
        text={
          first.verdict.margin_K === null
            ? standingWords(first)
            : `${standingWords(first)}, ${marginWords(first)}`
        }
      />
      {others > 0 && <span class="dim">{say('hands.andOthers', { count: others })}</span>}
      <EvidenceMark evidence={first.verdict.evidence} words />
    </p>
  )
}

const Hand = ({ entry, first, known }: { entry: Entry; first: boolean; known: Picture }) => {
  // Null until somebody presses: the first entry is open by itself, whichever it is by then.
  const pressed = useSignal<boolean | null>(null)
  const open = pressed.value ?? first
  const at = { now_ms: now_ms.value, zone: known.site.zone }
  const unit = known.storageUnits.find((u) => u.id === entry.storageUnit)
  return (
    <article class={`hand need-${entry.need}`}>
      <div class="lead">
        <span class={`big lead-${entry.lead.kind}`}>{leadWords(entry.lead)}</span>
        <span class="where" title={unit?.name}>
          {entry.storageUnit}
        </span>
      </div>
      <h3>
        <button
          type="button"
          class="headline"
          aria-expanded={open}
          onClick={() => (pressed.value = !open)}
        >
          {headline(entry, at)}
        </button>
      </h3>
      {open ? <Opened entry={entry} known={known} /> : <Closed entry={entry} known={known} />}
    </article>
  )
}

/** Nothing to do is said together with how much that is worth. */
const Empty = ({ known }: { known: Picture }) => {
  const { heard, all } = probesHeard.value
  return (
    <p class="empty">
      <b>{say('hands.none')}</b>{' '}
      {say('hands.noneRests', {
        time: clock(known.asOf_ms, known.site.zone),
        heard,
        all,
      })}{' '}
      {say('hands.notAssessable', { count: notAssessable(known.items) })}
    </p>
  )
}

/** Nobody reads more at once, and drawing hundreds twice a second would cost the chart its pace. */
const entriesAtATime = 20

/** Which stored items need a hand, in which order, and what to do and not to do there. */
export const HandsNeeded = () => {
  const known = picture.value
  const upTo = useSignal(entriesAtATime)
  if (known === null) return null
  const entries = hands.value
  const shown = entries.slice(0, upTo.value)
  const near = withinUncertainty(known.items, known.site.policy)
  return (
    <section class="hands" aria-label={say('hands.title')}>
      <header>
        <h2>{say('hands.title')}</h2>
        {stale.value !== null ? (
          <small>{say('hands.stale', { time: clock(known.asOf_ms, known.site.zone) })}</small>
        ) : (
          entries.length > 0 && <small>{say('hands.causes', { count: entries.length })}</small>
        )}
      </header>
      {entries.length === 0 && <Empty known={known} />}
      {shown.map((entry, i) => (
        <Hand key={entry.key} entry={entry} first={i === 0} known={known} />
      ))}
      {shown.length < entries.length && (
        <button type="button" class="plain rest" onClick={() => (upTo.value += entriesAtATime)}>
          {say('hands.moreEntries', { count: entries.length - shown.length })}
        </button>
      )}
      {near > 0 && <p class="within">{say('hands.within', { count: near })}</p>}
      {entries.length > 0 && (
        <p class="within">{say('hands.notAssessable', { count: notAssessable(known.items) })}</p>
      )}
    </section>
  )
}
