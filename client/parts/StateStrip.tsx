import { clock, duration, offset } from '../format.js'
import { follow } from '../route.js'
import { now_ms, type Picture, probesHeard, stale } from '../site.js'
import { say } from '../words.js'

/** Facts that qualify everything below: whose figures, how new, from how many probes. */
export const StateStrip = ({ known }: { known: Picture }) => {
  const { site, asOf_ms, intake } = known
  const { heard, all } = probesHeard.value
  return (
    <div class="state">
      <b class="site">{site.name}</b>
      <span>
        {say('state.asOf')}{' '}
        <b>
          {asOf_ms === 0 ? say('state.never') : clock(asOf_ms, site.zone)}{' '}
          {asOf_ms !== 0 && <span class="offset">{offset(asOf_ms, site.zone)}</span>}
        </b>
      </span>
      <span>
        {say('state.heard')} <b>{say('state.ofAll', { heard, all })}</b>
      </span>
      {intake.refused > 0 && (
        <a href="/probes" onClick={follow}>
          <b>{intake.refused}</b> {say('state.refused', { count: intake.refused })}
        </a>
      )}
      {intake.conflicts > 0 && (
        <a href="/probes" onClick={follow}>
          <b>{intake.conflicts}</b> {say('state.conflicts', { count: intake.conflicts })}
        </a>
      )}
      {intake.behind_s >= 10 && (
        <span>{say('state.behind', { lag: duration(intake.behind_s * 1000) })}</span>
      )}
    </div>
  )
}

/** What a person must know before believing the rest: outage, age, a fault of ours. */
export const Notices = ({ known }: { known: Picture }) => {
  const { intake, site } = known
  const old = stale.value
  return (
    <div class="notices">
      {old !== null && (
        <div class="stale" role="alert">
          <p>
            <b>{say('stale.since', { time: clock(old.since_ms, site.zone) })}</b>{' '}
            {say(old.why === 'link' ? 'stale.link' : 'stale.age', {
              age: duration(now_ms.value - old.since_ms),
            })}
          </p>
        </div>
      )}
      {intake.outage !== null && (
        <div class="note red" role="alert">
          <b>{say('outage.title')}</b> {intake.outage}
        </div>
      )}
      {intake.notEvaluated.length > 0 && (
        <div class="note red" role="alert">
          <b>{say('fault.title', { count: intake.notEvaluated.length })}</b>{' '}
          {intake.notEvaluated.join(', ')}
        </div>
      )}
    </div>
  )
}
