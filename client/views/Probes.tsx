import type { ProbeView, RefusedView } from '../../config/schema/api.js'
import type { Evidence } from '../../config/schema/verdict.js'
import { api, remedyOf } from '../api.js'
import { celsius, clock, day, duration, when } from '../format.js'
import { EvidenceMark } from '../parts/Marks.js'
import { useAsked } from '../parts/useAsked.js'
import { itemById, now_ms, type Picture, picture } from '../site.js'
import { say } from '../words.js'

const evidenceOf: Readonly<Record<ProbeView['placement'], Evidence>> = {
  'in-item': 'measured in item',
  'on-item-wall': 'measured on item wall',
  'in-witness': 'measured on witness',
  'in-buffer': 'inferred from buffer',
  'in-air': 'inferred from air',
}

/** The bar is full at twice the age at which a probe falls silent. */
const barIntervals = 6

/** How long ago, against how often it should speak. */
const Age = ({ probe, now }: { probe: ProbeView; now: number }) => {
  if (probe.heard_ms === null) return <>{say('probes.never')}</>
  const age_ms = now - probe.heard_ms
  const share = Math.min(1, Math.max(0, age_ms / (probe.interval_s * 1000 * barIntervals)))
  return (
    <>
      <span class="age" aria-hidden="true">
        <i style={{ width: `${share * 100}%` }} />
        <u />
      </span>
      {duration(age_ms)}
      <small>{say('probes.every', { interval: duration(probe.interval_s * 1000) })}</small>
    </>
  )
}

const Calibration = ({ probe, now, zone }: { probe: ProbeView; now: number; zone: string }) => {
  if (probe.calibrationDue_ms === null) return <>–</>
  const date = day(probe.calibrationDue_ms, zone)
  return probe.calibrationDue_ms < now ? (
    <b class="overdue">{say('probes.overdue', { date })}</b>
  ) : (
    date
  )
}

const placeWords = (probe: ProbeView): string => {
  if (probe.at === null) return say('probes.unassigned')
  const item = itemById.value.get(probe.at)
  return item === undefined ? probe.at : `${item.storageUnit}, ${item.position}`
}

const Row = ({ probe, known }: { probe: ProbeView; known: Picture }) => {
  const now = now_ms.value
  const { zone } = known.site
  return (
    <tr class={probe.silent ? 'silent' : ''}>
      <th scope="row">{probe.id}</th>
      <td>
        {placeWords(probe)}
        <small>{say(`placement.${probe.placement}`)}</small>
      </td>
      <td>
        <EvidenceMark evidence={evidenceOf[probe.placement]} />
      </td>
      <td class="num">
        <Age probe={probe} now={now} />
      </td>
      <td class="num">
        {probe.trusted_ms === null ? say('probes.never') : when(probe.trusted_ms, now, zone)}
        {probe.silent && <small>{say('probes.silent')}</small>}
      </td>
      <td class="r num">{probe.reading_C === null ? '–' : celsius(probe.reading_C, 2)}</td>
      <td>{probe.quality === null ? '–' : say(`quality.${probe.quality}`)}</td>
      <td class="num">
        <Calibration probe={probe} now={now} zone={zone} />
      </td>
      <td class="topic">{probe.topic ?? '–'}</td>
    </tr>
  )
}

const Counts = ({ known }: { known: Picture }) => {
  const { intake } = known
  const counts = [
    ['probes.readings', intake.readings],
    ['probes.duplicates', intake.duplicates],
    ['probes.conflicts', intake.conflicts],
    ['probes.bad', intake.bad],
    ['probes.refused', intake.refused],
  ] as const
  return (
    <dl class="lede counts">
      {counts.map(([key, count]) => (
        <div key={key}>
          <dt>{say(key)}</dt>
          <dd>{count.toLocaleString('en')}</dd>
        </div>
      ))}
    </dl>
  )
}

const RefusedRow = ({ row, zone }: { row: RefusedView; zone: string }) => (
  <tr>
    <td class="num">
      {day(row.receivedAt_ms, zone)} {clock(row.receivedAt_ms, zone)}
    </td>
    <td class="topic">{row.topic}</td>
    <td>
      {/* `-` names what was sent; the rest says what to do about it. */}
      <b>{row.field}</b> {say('refused.is')} <code>{row.value}</code>
      <small>{row.problem}</small>
    </td>
    <td>{row.remedy}</td>
    <td>
      <code class="payload">{row.payload}</code>
    </td>
  </tr>
)

const Refused = ({ known }: { known: Picture }) => {
  const asked = useAsked(() => api.refused(), 'refused', known.intake.refused)
  return (
    <section class="panel" aria-labelledby="refused-title">
      <header>
        <h2 id="refused-title">{say('refused.title')}</h2>
        <small>{say('refused.what')}</small>
      </header>
      {asked.kind === 'asking' && <p class="fetching">{say('loading.refused')}</p>}
      {asked.kind === 'failed' && (
        <p class="note red">{remedyOf(asked.error, say('error.unreachable'))}</p>
      )}
      {asked.kind === 'here' && asked.value.length === 0 && (
        <p class="pad dim">{say('refused.none')}</p>
      )}
      {asked.kind === 'here' && asked.value.length > 0 && (
        // biome-ignore lint/a11y/noNoninteractiveTabindex: it scrolls sideways on a narrow screen
        <section class="scroll" aria-label={say('refused.title')} tabIndex={0}>
          <table>
            <thead>
              <tr>
                <th scope="col">{say('refused.received')}</th>
                <th scope="col">{say('practice.topic')}</th>
                <th scope="col">{say('refused.found')}</th>
                <th scope="col">{say('refused.remedy')}</th>
                <th scope="col">{say('refused.payload')}</th>
              </tr>
            </thead>
            <tbody>
              {asked.value.map((row) => (
                <RefusedRow
                  key={`${row.receivedAt_ms} ${row.topic} ${row.payload}`}
                  row={row}
                  zone={known.site.zone}
                />
              ))}
            </tbody>
          </table>
        </section>
      )}
    </section>
  )
}

/** Is every probe heard and believable, and what could not be used? Unheard ones stand first. */
export const Probes = () => {
  const known = picture.value
  if (known === null) return null
  const probes = [...known.probes].sort(
    (a, b) => Number(b.silent) - Number(a.silent) || (a.id < b.id ? -1 : 1),
  )
  return (
    <div class="probes">
      <h1>{say('view.probes')}</h1>
      <Counts known={known} />
      <section class="panel strong" aria-label={say('view.probes')}>
        {/* biome-ignore lint/a11y/noNoninteractiveTabindex: it scrolls sideways on a narrow screen */}
        <section class="scroll" aria-label={say('probes.table')} tabIndex={0}>
          <table>
            <thead>
              <tr>
                <th scope="col">{say('probes.probe')}</th>
                <th scope="col">{say('probes.where')}</th>
                <th scope="col">
                  <span class="unseen">{say('table.rests')}</span>
                </th>
                <th scope="col">{say('probes.heard')}</th>
                <th scope="col">{say('probes.trusted')}</th>
                <th scope="col" class="r">
                  {say('probes.reading')}
                </th>
                <th scope="col">{say('probes.quality')}</th>
                <th scope="col">{say('probes.calibration')}</th>
                <th scope="col">{say('practice.topic')}</th>
              </tr>
            </thead>
            <tbody>
              {probes.map((probe) => (
                <Row key={probe.id} probe={probe} known={known} />
              ))}
            </tbody>
          </table>
        </section>
      </section>
      <Refused known={known} />
    </div>
  )
}
