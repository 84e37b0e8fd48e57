import { useSignal } from '@preact/signals'
import { api, remedyOf } from '../api.js'
import { isPhone, isWall } from '../screen.js'
import { picture } from '../site.js'
import { say } from '../words.js'

const speeds = [1, 10, 60, 300] as const

/** Sets the clock's speed; the bar reads as changed only once the server has said so. */
const useSpeed = () => {
  const failed = useSignal<string | null>(null)
  const set = async (wanted: number): Promise<void> => {
    failed.value = null
    try {
      await api.setSpeed(wanted)
    } catch (error) {
      failed.value = remedyOf(error, say('error.unreachable'))
    }
  }
  return { failed, set }
}

const Speed = ({ speed }: { speed: number }) => {
  const { failed, set } = useSpeed()
  return (
    <fieldset class="speed">
      <legend>{say('practice.speed')}</legend>
      {speeds.map((s) => (
        <button key={s} type="button" aria-pressed={speed === s} onClick={() => void set(s)}>
          {say('practice.times', { speed: String(s) })}
        </button>
      ))}
      {failed.value !== null && <p role="alert">{failed.value}</p>}
    </fieldset>
  )
}

/** The same on a phone, where four buttons would push the figures out of sight. */
const SpeedChoice = ({ speed }: { speed: number }) => {
  const { failed, set } = useSpeed()
  const known = speeds.some((s) => s === speed)
  return (
    <label class="speed-choice">
      {say('practice.speed')}{' '}
      <select
        value={String(speed)}
        onChange={(event) => void set(Number(event.currentTarget.value))}
      >
        {[...speeds, ...(known ? [] : [speed])].map((s) => (
          <option key={s} value={String(s)}>
            {say('practice.times', { speed: String(s) })}
          </option>
        ))}
      </select>
      {failed.value !== null && <span role="alert">{failed.value}</span>}
    </label>
  )
}

/** One probe that the simulator leaves alone, and the message that moves it. */
export const TryProbe = () => {
  const probe = picture.value?.site.tryProbe ?? null
  if (probe === null) return null
  const url = new URL(probe.mqtt)
  const port = url.port === '' ? '1883' : url.port
  const message = JSON.stringify([{ n: probe.name, u: 'Cel', v: -4.2 }])
  return (
    <details
      class="try"
      onKeyDown={(event) => {
        if (event.key !== 'Escape' || !event.currentTarget.open) return
        event.stopPropagation()
        event.currentTarget.open = false
        event.currentTarget.querySelector('summary')?.focus()
      }}
    >
      <summary>{say('practice.try')}</summary>
      <div class="tryBox">
        <p>{say('practice.tryText', { item: probe.item })}</p>
        <dl>
          <dt>{say('practice.topic')}</dt>
          <dd>
            <code>{probe.topic}</code>
          </dd>
          <dt>{say('practice.name')}</dt>
          <dd>
            <code>{probe.name}</code>
          </dd>
        </dl>
        <pre>{`mosquitto_pub -h ${url.hostname} -p ${port} -q 1 -t '${probe.topic}' -m '${message}'`}</pre>
      </div>
    </details>
  )
}

/** The mark that no picture of a simulated site can lose: a frame on all four sides, and the bar. */
export const PracticeBar = () => {
  const site = picture.value?.site
  if (site === undefined || !site.practice) return null
  if (isPhone.value)
    return (
      <section class="practice-bar" aria-label={say('practice.word')}>
        <b>{say('practice.word')}</b>
        <SpeedChoice speed={site.speed} />
        <span class="what">{say('practice.short')}</span>
      </section>
    )
  return (
    <section class="practice-bar" aria-label={say('practice.word')}>
      <b>{say('practice.word')}</b>
      <span class="what">{say('practice.text')}</span>
      {!isWall.value && <TryProbe />}
      {isWall.value ? (
        <span>{say('practice.times', { speed: String(site.speed) })}</span>
      ) : (
        <Speed speed={site.speed} />
      )}
    </section>
  )
}

export const PracticeFrame = () => <div class="practice-frame" aria-hidden="true" />
