import type { ItemReadings } from '../../config/schema/api.js'
import { chance, clock, interval, num } from '../format.js'
import { say } from '../words.js'

/** Rows that a person may still read; zoom in for the others. */
const rowsAtMost = 200

type Span = { readonly from_ms: number; readonly until_ms: number }

const within =
  ({ from_ms, until_ms }: Span) =>
  <T extends readonly [number, ...unknown[]]>(row: T): boolean =>
    row[0] >= from_ms && row[0] <= until_ms

/** The chart's figures as a table: readings as sent, and what was and will be reckoned. */
export const ReadingsTable = ({
  readings,
  seen,
  zone,
  now_ms,
}: {
  readings: ItemReadings
  seen: Span
  zone: string
  now_ms: number
}) => {
  const read = readings.probes
    .flatMap((p) =>
      p.points.filter(within(seen)).map(([t, c, q]) => ({
        t,
        source: `${p.probe}, ${say(`placement.${p.placement}`)}`,
        figure: c === null ? '–' : num(c, 2),
        note: q === 'good' ? '' : q,
        reckoned: false,
      })),
    )
    .concat(
      readings.estimate.filter(within(seen)).map(([t, T, u]) => ({
        t,
        source: say('trace.estimate'),
        figure: interval(T - 2 * u, T + 2 * u, 1),
        note: '',
        reckoned: true,
      })),
    )
    .sort((a, b) => b.t - a.t)
  const ahead = readings.forecast.filter(within(seen)).filter(([t]) => t > now_ms)
  const chanceAt = new Map(readings.chance.map((f) => [f[0], f]))
  const shown = read.slice(0, rowsAtMost)
  return (
    // biome-ignore lint/a11y/noNoninteractiveTabindex: it scrolls by itself
    <section class="scroll figures" aria-label={say('figures.title')} tabIndex={0}>
      <table>
        <caption>{say('figures.read', { shown: shown.length, all: read.length })}</caption>
        <thead>
          <tr>
            <th scope="col">{say('figures.time')}</th>
            <th scope="col">{say('figures.source')}</th>
            <th scope="col" class="r">
              °C
            </th>
            <th scope="col">{say('figures.note')}</th>
          </tr>
        </thead>
        <tbody>
          {shown.map((row) => (
            <tr key={`${row.t} ${row.source}`} class={row.reckoned ? 'reckoned' : ''}>
              <td class="num">{clock(row.t, zone)}</td>
              <td>{row.source}</td>
              <td class="r num">{row.figure}</td>
              <td>{row.note}</td>
            </tr>
          ))}
        </tbody>
      </table>
      {ahead.length > 0 && (
        <table>
          <caption>{say('figures.ahead')}</caption>
          <thead>
            <tr>
              <th scope="col">{say('figures.time')}</th>
              <th scope="col" class="r">
                °C
              </th>
              <th scope="col" class="r">
                {say('chart.chance')}
              </th>
            </tr>
          </thead>
          <tbody>
            {ahead.map(([t, low, , high]) => {
              const likely = chanceAt.get(t)
              return (
                <tr key={t} class="reckoned">
                  <td class="num">{clock(t, zone)}</td>
                  <td class="r num">{interval(low, high)}</td>
                  <td class="r num">{likely === undefined ? '–' : chance(likely[1], likely[3])}</td>
                </tr>
              )
            })}
          </tbody>
        </table>
      )}
    </section>
  )
}
