import { useEffect } from 'preact/hooks'
import type { CautionRow, ItemView } from '../../config/schema/api.js'
import { api } from '../api.js'
import { celsius, chance, duration, interval, num, signed } from '../format.js'
import { DoDoNot } from '../parts/DoDoNot.js'
import { IfItFreezes } from '../parts/IfItFreezes.js'
import { HasIceFormed, NeverSaid, ReadingLimits, RestsOn, Trail, Why } from '../parts/ItemPanels.js'
import { EvidenceMark, Mark } from '../parts/Marks.js'
import { TimeFigure } from '../parts/TimeFigure.js'
import { useAsked } from '../parts/useAsked.js'
import { follow, go } from '../route.js'
import { isPhone } from '../screen.js'
import { nameAndCount, standingWords } from '../sentences.js'
import { isAsIntended, marginU_K, markOf } from '../shown.js'
import { cautions, itemById, now_ms, type Picture, picture, stale } from '../site.js'
import { say } from '../words.js'

/** Where the line lies within the uncertainty, neither "below" nor "above" can be said. */
const marginKey = (margin_K: number | null, u_K: number | null): string => {
  if (margin_K === null || Math.abs(margin_K) <= 2 * (u_K ?? 0)) return 'lede.margin'
  return margin_K < 0 ? 'lede.below' : 'lede.above'
}

const Margin = ({ margin_K, u_K }: { margin_K: number | null; u_K: number | null }) => {
  if (margin_K === null) return <>–</>
  const sure = marginKey(margin_K, u_K) !== 'lede.margin'
  const size = sure ? Math.abs(margin_K) : margin_K
  return (
    <>
      {sure ? num(size) : signed(size)} K{' '}
      {u_K !== null && <i>({interval(size - 2 * u_K, size + 2 * u_K)})</i>}
    </>
  )
}

/** The row of figures: each with what it rests on. */
const Lede = ({ item, known }: { item: ItemView; known: Picture }) => {
  const { verdict } = item
  const u_K = marginU_K(item)
  const mark = <EvidenceMark evidence={verdict.evidence} />
  const margin = verdict.margin_K
  const old = stale.value !== null
  return (
    <dl class="lede">
      <div>
        <dt>
          {say(marginKey(margin, u_K))} {mark}
        </dt>
        <dd>
          <Margin margin_K={margin} u_K={u_K} />
        </dd>
      </div>
      <div>
        <dt>
          {say('lede.estimate')} {mark}
        </dt>
        <dd>
          {verdict.temperature_C === null ? '–' : celsius(verdict.temperature_C)}{' '}
          {verdict.u_K !== null && <i>(±{num(2 * verdict.u_K)} K)</i>}
        </dd>
      </div>
      <div>
        <dt>{say('lede.since', { standing: standingWords(item) })}</dt>
        <dd>{duration(now_ms.value - item.since_ms)}</dd>
      </div>
      <div>
        <dt>
          {say('lede.chance', {
            hours: num(verdict.chance?.horizon_h ?? known.site.policy.poisedHorizon_h, 0),
            count: item.count,
          })}{' '}
          {mark}
        </dt>
        <dd>
          {verdict.chance === null || old ? '–' : chance(verdict.chance.low, verdict.chance.high)}
        </dd>
      </div>
      <div class="basis">
        <dt>{say('lede.basis')}</dt>
        <dd>
          {old
            ? say('chance.stale')
            : verdict.chance === null
              ? say('chance.none')
              : verdict.chance.basis}
        </dd>
      </div>
    </dl>
  )
}

const Heading = ({ item, known }: { item: ItemView; known: Picture }) => {
  const label = item.label_C
  const name = nameAndCount(item)
  return (
    <header class="item-head">
      <nav class="crumb" aria-label={say('item.crumb')}>
        <a href="/" onClick={follow}>
          {say('view.waterline')}
        </a>{' '}
        / {item.storageUnit} / {item.position}
      </nav>
      <div class="verdict">
        <Mark kind={markOf(item, known.site.policy)} size={isPhone.value ? 34 : 40} />
        <h1>
          {standingWords(item)}
          <span class="name">: {name}</span>
        </h1>
      </div>
      <p class="facts">
        {say('item.lot')} <b>{item.lot === '' ? '–' : item.lot}</b>
        {label !== null && (
          <>
            {' · '}
            {say('item.labelRange')} <b>{interval(label[0], label[1], 0)} °C</b>
          </>
        )}
        {' · '}
        <b>{say(`harm.${item.harm}`)}</b>
        {' · '}
        {item.containerName}
        {' · '}
        <EvidenceMark evidence={item.verdict.evidence} words />
      </p>
      {isAsIntended(item) && <p class="note">{say('item.asIntended')}</p>}
    </header>
  )
}

const rowsOf = (keys: readonly string[]): CautionRow[] =>
  keys.map((key) => cautions.value.get(key)).filter((row) => row !== undefined)

const Sheet = ({ item, known }: { item: ItemView; known: Picture }) => {
  const at = { now_ms: now_ms.value, zone: known.site.zone }
  const curves = useAsked(() => api.curves(item.id), item.id, item.verdict.t)
  const trail = useAsked(
    () => api.trail(item.id),
    item.id,
    `${item.since_ms} ${item.verdict.phase} ${item.verdict.evidence}`,
  )
  const { policy } = known.site
  return (
    <div class="sheet">
      <Heading item={item} known={known} />
      <Lede item={item} known={known} />
      <div class="stack wide">
        <TimeFigure item={item} known={known} />
        <div class="pair">
          <ReadingLimits item={item} />
          <HasIceFormed item={item} at={at} />
        </div>
        <Why item={item} />
        <RestsOn curves={curves} item={item} />
        <NeverSaid item={item} />
      </div>
      <div class="stack side">
        <section class="what-to-do" aria-label={say('caution.title')}>
          <DoDoNot rows={rowsOf(item.verdict.cautions)} />
        </section>
        <IfItFreezes item={item} known={known} asked={curves} />
        <Trail asked={trail} at={at} policy={policy} item={item} />
      </div>
      <p class="statement">{say('frame.statement')}</p>
    </div>
  )
}

/** Everything known of one stored item. */
export const ItemSheet = ({ id }: { id: string }) => {
  const known = picture.value
  const item = itemById.value.get(id)
  useEffect(() => {
    const onKey = (event: KeyboardEvent): void => {
      if (event.key === 'Escape') go('/')
    }
    addEventListener('keydown', onKey)
    return () => removeEventListener('keydown', onKey)
  }, [])
  if (known === null) return null
  if (item === undefined)
    return (
      <section class="message">
        <h1>{say('item.unknown', { id })}</h1>
        <p>{say('item.unknownRemedy')}</p>
        <a class="btn" href="/" onClick={follow}>
          {say('view.waterline')}
        </a>
      </section>
    )
  return <Sheet key={id} item={item} known={known} />
}
