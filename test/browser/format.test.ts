import { expect, test } from 'vitest'
import {
  celsius,
  chance,
  clock,
  duration,
  hours,
  interval,
  kelvin,
  marginInterval,
  num,
  offset,
  rough,
  signed,
  when,
} from '../../client/format.js'

test.each([
  [-5.04, 1, '−5.0'],
  [-0.04, 1, '0.0'], // what rounds to zero is not negative
  [3, 0, '3'],
])('%d with %d digits reads %s, with a true minus', (value, digits, text) => {
  expect(num(value, digits)).toBe(text)
})

test('a margin above zero bears its plus, zero bears none', () => {
  expect([signed(1.44), signed(-1.44), signed(0.01)]).toEqual(['+1.4', '−1.4', '0.0'])
})

test('temperatures are in °C, differences in K', () => {
  expect([celsius(-0.53, 2), kelvin(4.4)]).toEqual(['−0.53 °C', '4.4 K'])
})

test('an interval has an ellipsis and no spaces; equal ends are one figure', () => {
  expect(interval(-6.2, -3.9)).toBe('−6.2…−3.9')
  expect(interval(2.01, 2.04)).toBe('2.0')
})

test('the interval of a margin is twice its standard uncertainty to each side', () => {
  expect(marginInterval(-4.4, 0.45)).toBe('−5.3…−3.5')
})

test.each([
  [5e-7, 0.22, 'under 0.1…22 %'],
  [0.004, 0.0042, '0.4 %'],
  [0.34, 0.9999, '34…over 99 %'],
  [1, 1, 'over 99 %'],
  [0, 0, 'under 0.1 %'],
])('a chance of %d to %d reads %s: never a certainty', (low, high, text) => {
  expect(chance(low, high)).toBe(text)
})

test.each([
  [11 / 60, 46 / 60, '11…46 min'],
  [1.9, 4.1, '1.9…4.1 h'],
  [12, 30, '12…30 h'],
  [60, 96, '2.5…4.0 d'],
])('%d to %d hours reads %s', (low, high, text) => {
  expect(hours(low, high)).toBe(text)
})

test.each([
  [-5, '0 s'], // a clock that is a little ahead makes nothing negative
  [15_400, '15 s'],
  [110_000, '1 min 50'],
  [120_000, '2 min'],
  [17 * 60_000 + 59_000, '17 min'],
  [(11 * 60 + 40) * 60_000, '11 h 40'],
  [76 * 3_600_000, '3 d 4 h'],
])('%d ms reads %s', (ms, text) => {
  expect(duration(ms)).toBe(text)
})

test.each([
  [0.0553, '0.055'],
  [17.4, '17'],
  [288, '288'],
  [0, '0'],
])('a heat of %d kJ reads %s', (value, text) => {
  expect(rough(value)).toBe(text)
})

test('times are the site’s, whatever zone the reader sits in', () => {
  const t = Date.parse('2026-07-01T22:30:05Z')
  expect(clock(t, 'Europe/Lisbon')).toBe('23:30:05')
  expect(clock(t, 'America/St_Johns')).toBe('20:00:05')
})

test.each([
  ['2026-01-05T00:00:00Z', 'Europe/Lisbon', '+00:00'],
  ['2026-07-05T00:00:00Z', 'Europe/Lisbon', '+01:00'],
  ['2026-07-05T00:00:00Z', 'America/St_Johns', '-02:30'],
])('the offset at %s in %s is %s', (t, zone, text) => {
  expect(offset(Date.parse(t), zone)).toBe(text)
})

test('another day is named, another year in full', () => {
  const now = Date.parse('2026-01-05T02:00:00Z')
  expect(when(Date.parse('2026-01-05T01:10:00Z'), now, 'UTC')).toBe('01:10')
  expect(when(Date.parse('2026-01-04T23:10:00Z'), now, 'UTC')).toBe('01-04 23:10')
  expect(when(Date.parse('2025-12-24T23:10:00Z'), now, 'UTC')).toBe('2025-12-24 23:10')
})
