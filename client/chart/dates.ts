import { _adapters } from 'chart.js'
import { DateTime, type DateTimeUnit } from 'luxon'

type Options = { zone?: string }
const unitOf = (unit: string): DateTimeUnit => (unit === 'isoWeek' ? 'week' : unit) as DateTimeUnit
/** The time in the site's zone, which need not be the reader's. */
const at = (t_ms: number, { zone }: Options): DateTime =>
  DateTime.fromMillis(t_ms, { zone: zone ?? 'UTC' })

/** Midnight before an instant, by the site's clock. */
export const dayStart_ms = (t_ms: number, zone: string): number =>
  at(t_ms, { zone }).startOf('day').toMillis()

const formats = {
  datetime: 'yyyy-MM-dd HH:mm:ss',
  millisecond: 'HH:mm:ss',
  second: 'HH:mm:ss',
  minute: 'HH:mm',
  hour: 'HH:mm',
  day: 'MM-dd',
  week: 'MM-dd',
  month: 'yyyy-MM',
  quarter: 'yyyy-MM',
  year: 'yyyy',
}

/** Chart.js asks here for its dates. */
_adapters._date.override<Options>({
  init() {},
  formats: () => formats,
  parse: (value) => (typeof value === 'number' ? value : null),
  format(t, pattern) {
    return at(t, this.options).toFormat(pattern)
  },
  add(t, amount, unit) {
    return at(t, this.options)
      .plus({ [unit]: amount })
      .toMillis()
  },
  diff(a, b, unit) {
    return at(a, this.options).diff(at(b, this.options)).as(unitOf(unit))
  },
  startOf(t, unit) {
    return at(t, this.options).startOf(unitOf(unit)).toMillis()
  },
  endOf(t, unit) {
    return at(t, this.options).endOf(unitOf(unit)).toMillis()
  },
})
