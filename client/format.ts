/** Figures as people read them: true minus, unit always, `…` for intervals, no spaces inside. */

/** A number with a true minus (U+2212). What rounds to zero carries no sign. */
export const num = (value: number, digits = 1): string => {
  const text = Math.abs(value).toFixed(digits)
  return value < 0 && Number(text) !== 0 ? `−${text}` : text
}

/** As `num`, with a plus where it is above zero. */
export const signed = (value: number, digits = 1): string => {
  const text = num(value, digits)
  return value > 0 && Number(text) !== 0 ? `+${text}` : text
}

/** Two significant figures, for heats that span decades. */
export const rough = (value: number): string => {
  const size = Math.abs(value)
  const digits = size === 0 ? 0 : Math.max(0, 1 - Math.floor(Math.log10(size)))
  return num(value, Math.min(digits, 6))
}

/** `3.4…5.3`; one figure where both ends round to the same. */
export const interval = (low: number, high: number, digits = 1): string => {
  const [from, to] = [num(low, digits), num(high, digits)]
  return from === to ? from : `${from}…${to}`
}

export const celsius = (value: number, digits = 1): string => `${num(value, digits)} °C`
/** A difference of temperatures is in kelvin, never in °C. */
export const kelvin = (value: number, digits = 1): string => `${num(value, digits)} K`

/** How much margin there is, as it was reckoned: ± twice its standard uncertainty. */
export const marginInterval = (margin_K: number, u_K: number, digits = 1): string =>
  interval(margin_K - 2 * u_K, margin_K + 2 * u_K, digits)

const percentNumber = (p: number): string => {
  // A likelihood is never shown as a certainty, at neither end.
  if (p < 0.001) return 'under 0.1'
  if (p > 0.99) return 'over 99'
  return p < 0.01 ? num(p * 100, 1) : num(p * 100, 0)
}

/** A chance as an interval: `6…over 99 %`. */
export const chance = (low: number, high: number): string => {
  const [from, to] = [percentNumber(low), percentNumber(high)]
  return from === to ? `${from} %` : `${from}…${to} %`
}

const minute_ms = 60_000
const hour_ms = 3_600_000
const day_ms = 86_400_000

/** How long, at a glance: `15 s`, `1 min 50`, `17 min`, `11 h 40`, `3 d 4 h`. */
export const duration = (given_ms: number): string => {
  const ms = Math.max(0, given_ms)
  const two = (n: number) => String(Math.floor(n)).padStart(2, '0')
  if (ms < minute_ms) return `${Math.floor(ms / 1000)} s`
  if (ms < 10 * minute_ms) {
    const seconds = (ms % minute_ms) / 1000
    return `${Math.floor(ms / minute_ms)} min${seconds >= 1 ? ` ${two(seconds)}` : ''}`
  }
  if (ms < hour_ms) return `${Math.floor(ms / minute_ms)} min`
  if (ms < day_ms)
    return `${Math.floor(ms / hour_ms)} h${ms % hour_ms >= minute_ms ? ` ${two((ms % hour_ms) / minute_ms)}` : ''}`
  return `${Math.floor(ms / day_ms)} d${ms % day_ms >= hour_ms ? ` ${Math.floor((ms % day_ms) / hour_ms)} h` : ''}`
}

/** A span of time to come, in hours, as an interval in the unit that suits its far end. */
export const hours = (low_h: number, high_h: number): string => {
  if (high_h < 1.5) return `${interval(low_h * 60, high_h * 60, 0)} min`
  if (high_h < 48) return `${interval(low_h, high_h, high_h < 10 ? 1 : 0)} h`
  return `${interval(low_h / 24, high_h / 24, high_h < 240 ? 1 : 0)} d`
}

type Parts = Readonly<Record<'year' | 'month' | 'day' | 'hour' | 'minute' | 'second', string>>

const formats = new Map<string, Intl.DateTimeFormat>()
const formatOf = (zone: string, options: Intl.DateTimeFormatOptions): Intl.DateTimeFormat => {
  const key = `${zone} ${options.timeZoneName ?? ''}`
  let format = formats.get(key)
  if (format === undefined) {
    format = new Intl.DateTimeFormat('en-GB', { timeZone: zone, hourCycle: 'h23', ...options })
    formats.set(key, format)
  }
  return format
}

const partsOf = (t_ms: number, zone: string): Parts => {
  const format = formatOf(zone, {
    year: 'numeric',
    month: '2-digit',
    day: '2-digit',
    hour: '2-digit',
    minute: '2-digit',
    second: '2-digit',
  })
  const found: Record<string, string> = {}
  for (const { type, value } of format.formatToParts(t_ms)) found[type] = value
  // The cast: exactly these six were asked for above.
  return found as Parts
}

/** `03:24:10` in the site's zone; the offset stands once per view. */
export const clock = (t_ms: number, zone: string): string => {
  const p = partsOf(t_ms, zone)
  return `${p.hour}:${p.minute}:${p.second}`
}

/** `03:24` */
export const clockMinute = (t_ms: number, zone: string): string => {
  const p = partsOf(t_ms, zone)
  return `${p.hour}:${p.minute}`
}

/** `2026-01-05` */
export const day = (t_ms: number, zone: string): string => {
  const p = partsOf(t_ms, zone)
  return `${p.year}-${p.month}-${p.day}`
}

/** The minute, with its month and day where that is not today. */
export const when = (t_ms: number, now_ms: number, zone: string): string => {
  const date = day(t_ms, zone)
  const today = day(now_ms, zone)
  if (date === today) return clockMinute(t_ms, zone)
  const short = date.slice(0, 4) === today.slice(0, 4) ? date.slice(5) : date
  return `${short} ${clockMinute(t_ms, zone)}`
}

/** `+01:00`, the site's offset at that instant. */
export const offset = (t_ms: number, zone: string): string => {
  const format = formatOf(zone, { timeZoneName: 'longOffset' })
  const name = format.formatToParts(t_ms).find((p) => p.type === 'timeZoneName')?.value ?? 'GMT'
  return name === 'GMT' ? '+00:00' : name.replace('GMT', '')
}
