import { useSignal } from '@preact/signals'
import { memo } from 'preact/compat'
import type { ItemView } from '../../config/schema/api.js'
import { marginInterval, num, signed } from '../format.js'
import { type Lead, tableOrder } from '../hands.js'
import { follow, itemPath } from '../route.js'
import { leadWords, nameAndCount, standingWords } from '../sentences.js'
import { marginU_K, markOf, shortPlace } from '../shown.js'
import { hands, picture } from '../site.js'
import { say } from '../words.js'
import { Chip, EvidenceMark } from './Marks.js'

/** Rows drawn at once: thousands would make every batch of the feed heavy. */
const rowsAtATime = 250

type RowProps = {
  readonly item: ItemView
  readonly leadText: string
  readonly mark: ReturnType<typeof markOf>
}

const Row = memo(({ item, leadText, mark }: RowProps) => {
  const u_K = marginU_K(item)
  const { margin_K } = item.verdict
  return (
    <tr>
      <td class="nw place">{item.storageUnit}</td>
      <td class="nw place">{shortPlace(item.position)}</td>
      <th scope="row">
        <a href={itemPath(item.id)} onClick={follow}>
          {nameAndCount(item)}
        </a>
        {/* On a phone the place stands under the name, so that the standing is in sight. */}
        <small class="at">
          {item.storageUnit} {shortPlace(item.position)}
        </small>
      </th>
      <td>
        <Chip kind={mark} text={standingWords(item)} size={20} />
      </td>
      <td class="r num">{margin_K === null ? '–' : signed(margin_K)}</td>
      <td class="r num">
        {margin_K === null || u_K === null ? '–' : marginInterval(margin_K, u_K)}
      </td>
      <td class="r num spare">
        {item.verdict.temperature_C === null ? '–' : num(item.verdict.temperature_C)}
      </td>
      <td class="r num spare">{num(item.verdict.freezingPoint_C, 2)}</td>
      <td>
        <EvidenceMark evidence={item.verdict.evidence} words />
      </td>
      <td class="nw">
        <b>{leadText}</b>
      </td>
    </tr>
  )
})

/** The Waterline in words and figures: the form for the keyboard, the ear and the printer. */
export const TwinTable = () => {
  const known = picture.value
  const upTo = useSignal(rowsAtATime)
  if (known === null) return null
  const rows = tableOrder(known.items, hands.value)
  const shown = rows.slice(0, upTo.value)
  const more = rows.length - shown.length
  const text = (lead: Lead | null) => (lead === null ? '' : leadWords(lead))
  return (
    // A region that scrolls sideways on a narrow screen must be reachable by the keyboard.
    // biome-ignore lint/a11y/noNoninteractiveTabindex: see above
    <section class="scroll twin" aria-label={say('table.caption')} tabIndex={0}>
      <table>
        <caption class="unseen">{say('table.caption')}</caption>
        <thead>
          <tr>
            <th scope="col" class="place">
              {say('table.unit')}
            </th>
            <th scope="col" class="place">
              {say('table.place')}
            </th>
            <th scope="col">{say('table.item')}</th>
            <th scope="col">{say('table.standing')}</th>
            <th scope="col" class="r">
              {say('table.margin')}
            </th>
            <th scope="col" class="r">
              {say('table.interval')}
            </th>
            <th scope="col" class="r spare">
              {say('table.estimate')}
            </th>
            <th scope="col" class="r spare">
              {say('table.line')}
            </th>
            <th scope="col">{say('table.rests')}</th>
            <th scope="col">{say('table.lead')}</th>
          </tr>
        </thead>
        <tbody>
          {shown.map(({ item, lead }) => (
            <Row
              key={item.id}
              item={item}
              leadText={text(lead)}
              mark={markOf(item, known.site.policy)}
            />
          ))}
        </tbody>
      </table>
      {more > 0 && (
        <button type="button" class="plain" onClick={() => (upTo.value += rowsAtATime)}>
          {say('table.more', { count: more })}
        </button>
      )}
    </section>
  )
}
