import { useSignal } from '@preact/signals'
import type { ItemCurves, ItemTrail, ItemView, Snapshot } from '../../config/schema/api.js'
import { celsius, chance, clock, interval, kelvin, signed, when } from '../format.js'
import { markOf } from '../shown.js'
import { say, wordFor } from '../words.js'
import { Mark } from './Marks.js'
import type { Asked } from './useAsked.js'

type Zoned = { readonly now_ms: number; readonly zone: string }

/** Q1, apart from all else: did a reading leave its limits? From readings, never from the estimate. */
export const ReadingLimits = ({ item }: { item: ItemView }) => {
  const { limits } = item.verdict
  const label = item.label_C
  return (
    <section class="panel" aria-label={say('limits.title')}>
      <header>
        <h2>{say('limits.title')}</h2>
        <small>{say('limits.from')}</small>
      </header>
      <dl class="out">
        <div>
          <dt>{say('limits.reading')}</dt>
          <dd>
            {limits.reading_C === null ? say('frame.unknown') : celsius(limits.reading_C, 2)}
            {limits.probe !== null && <small>{say('limits.probe', { probe: limits.probe })}</small>}
          </dd>
        </div>
        <div>
          <dt>
            {label === null
              ? say('limits.label')
              : say('limits.labelRange', { range: interval(label[0], label[1], 1) })}
          </dt>
          <dd class={`limit-${limits.label}`}>{say(`limit.${limits.label}`)}</dd>
        </div>
        <div>
          <dt>{say('limits.alert')}</dt>
          <dd class={`limit-${limits.alert}`}>{say(`limit.${limits.alert}`)}</dd>
        </div>
        <div>
          <dt>{say('limits.action')}</dt>
          <dd class={`limit-${limits.action}`}>{say(`limit.${limits.action}`)}</dd>
        </div>
      </dl>
    </section>
  )
}

/** Q3: has ice formed, how much, when? As an interval, with what it rests on. */
export const HasIceFormed = ({ item, at }: { item: ItemView; at: Zoned }) => {
  const { turned, hasBeenFrozen, phase } = item.verdict
  const [low, , high] = turned.any
  // Of what nobody hears nothing can be said, least of all that a chance is small.
  const assessable = item.verdict.evidence !== 'not assessable'
  const time = (text: string) => when(Date.parse(text), at.now_ms, at.zone)
  return (
    <section class="panel" aria-label={say('ice.title')}>
      <header>
        <h2>{say('ice.title')}</h2>
        <small>{say(`evidence.${item.verdict.evidence}`)}</small>
      </header>
      <dl class="out">
        <div>
          <dt>{say('ice.any', { count: item.count })}</dt>
          <dd>{assessable ? chance(low, high) : say('ice.notAssessable')}</dd>
        </div>
        {assessable && item.count > 1 && (
          <div>
            <dt>{say('ice.count')}</dt>
            <dd>
              {say('ice.ofCount', {
                range: interval(turned.count[0], turned.count[2], 0),
                count: String(item.count),
              })}
            </dd>
          </div>
        )}
        {turned.earliest !== null && turned.latest !== null && (
          <div>
            <dt>{say('ice.when')}</dt>
            <dd>
              {time(turned.earliest) === time(turned.latest)
                ? time(turned.earliest)
                : `${time(turned.earliest)}…${time(turned.latest)}`}
              {turned.reckoned && <small>{say('ice.reckoned')}</small>}
            </dd>
          </div>
        )}
        {turned.from_C !== null && (
          <div>
            <dt>{say('ice.from')}</dt>
            <dd>{celsius(turned.from_C)}</dd>
          </div>
        )}
        <div>
          <dt>{say('ice.phase')}</dt>
          <dd>
            {say(`phase.${phase}`)}
            {hasBeenFrozen && <small>{say('ice.hasBeenFrozen')}</small>}
          </dd>
        </div>
      </dl>
    </section>
  )
}

/** The parts of the margin's standard uncertainty, largest first. */
export const RestsOn = ({ curves, item }: { curves: Asked<ItemCurves>; item: ItemView }) => {
  if (curves.kind !== 'here' || curves.value.budget.length === 0) return null
  const parts = [...curves.value.budget].sort((a, b) => b.u_K - a.u_K)
  const together = Math.hypot(...parts.map((p) => p.u_K))
  return (
    <section class="panel" aria-label={say('budget.title')}>
      <header>
        <h2>{say('budget.title')}</h2>
        <small>{say('budget.of')}</small>
      </header>
      <div class="pad">
        <table class="budget">
          <tbody>
            {parts.map((part) => (
              <tr key={part.key}>
                <th scope="row">{wordFor(part.key)}</th>
                <td class="bar">
                  <i style={{ width: `${(100 * part.u_K) / together}%` }} />
                </td>
                <td class="r num">{kelvin(part.u_K, 2)}</td>
              </tr>
            ))}
            <tr>
              <th scope="row">
                <b>{say('budget.together')}</b>
              </th>
              <td />
              <td class="r num">
                <b>{kelvin(together, 2)}</b>
              </td>
            </tr>
          </tbody>
        </table>
        <p class="small">
          {say('item.model', {
            model: item.verdict.model,
            revision: String(item.verdict.configRevision),
          })}
        </p>
      </div>
    </section>
  )
}

/** Changes shown at once. */
const changesAtATime = 10

/** Changes of standing, phase or evidence, newest first. */
export const Trail = ({
  asked,
  at,
  policy,
  item,
}: {
  asked: Asked<ItemTrail>
  at: Zoned
  policy: Snapshot['site']['policy']
  item: ItemView
}) => {
  const upTo = useSignal(changesAtATime)
  const more = asked.kind === 'here' ? asked.value.length - upTo.value : 0
  return (
    <section class="panel" aria-label={say('trail.title')}>
      <header>
        <h2>{say('trail.title')}</h2>
        <small>{say('trail.what')}</small>
      </header>
      {asked.kind === 'asking' && <p class="fetching">{say('loading.trail')}</p>}
      {asked.kind === 'here' && asked.value.length === 0 && (
        <p class="pad dim">{say('trail.none')}</p>
      )}
      {asked.kind === 'here' && (
        <ol class="trail">
          {asked.value.slice(0, upTo.value).map((change) => (
            <li key={`${change.t_ms} ${change.standing} ${change.phase} ${change.evidence}`}>
              <b class="num" title={clock(change.t_ms, at.zone)}>
                {when(change.t_ms, at.now_ms, at.zone)}
              </b>
              <span>
                <Mark
                  kind={markOf(
                    {
                      ...item,
                      announcedTurned_ms: null,
                      verdict: { ...item.verdict, standing: change.standing },
                    },
                    policy,
                  )}
                  size={18}
                />{' '}
                <b>{say(`standing.${change.standing}`)}</b>, {say(`phase.${change.phase}`)}
                {change.margin_K !== null && ` · ${signed(change.margin_K)} K`}
                {change.why[0] !== undefined && <small>{change.why[0]}</small>}
              </span>
            </li>
          ))}
        </ol>
      )}
      {more > 0 && (
        <button type="button" class="plain rest" onClick={() => (upTo.value += changesAtATime)}>
          {say('trail.more', { count: more })}
        </button>
      )}
    </section>
  )
}

/** Why the verdict is what it is: each reason a plain sentence. */
export const Why = ({ item }: { item: ItemView }) =>
  item.verdict.why.length === 0 ? null : (
    <section class="panel" aria-label={say('why.title')}>
      <header>
        <h2>{say('why.title')}</h2>
      </header>
      <ul class="why">
        {item.verdict.why.map((text) => (
          <li key={text}>{text}</li>
        ))}
      </ul>
    </section>
  )

/** Q4 and Q5: what Hoarline never says, and where the answer will stand. */
export const NeverSaid = ({ item }: { item: ItemView }) => (
  <section class="panel" aria-label={say('never.title')}>
    <header>
      <h2>{say('never.title')}</h2>
    </header>
    <p class="pad">
      {say('never.harm')}{' '}
      {item.verdict.disposition === null
        ? say('never.none')
        : say('never.disposition', { disposition: item.verdict.disposition })}
    </p>
  </section>
)
