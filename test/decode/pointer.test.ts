import { expect, test } from 'vitest'
import { at } from '../../server/decode/pointer.js'

const doc = {
  foo: ['bar', 'baz'],
  '': 0,
  'a/b': 1,
  'c%d': 2,
  'e^f': 3,
  'g|h': 4,
  'i\\j': 5,
  'k"l': 6,
  ' ': 7,
  'm~n': 8,
}

test.each([
  ['', doc],
  ['/foo', ['bar', 'baz']],
  ['/foo/0', 'bar'],
  ['/', 0],
  ['/a~1b', 1],
  ['/c%d', 2],
  ['/e^f', 3],
  ['/g|h', 4],
  ['/i\\j', 5],
  ['/k"l', 6],
  ['/ ', 7],
  ['/m~0n', 8],
])('%j points where RFC 6901 §5 says', (pointer, value) => {
  expect(at(doc, pointer)).toEqual(value)
})

test.each(['/foo/00', '/foo/-', '/foo/2', '/foo/bar', '/nothing', '/foo/0/length', '/foo/1e0'])(
  '%j points at nothing (RFC 6901 §4)',
  (pointer) => {
    expect(at(doc, pointer)).toBeUndefined()
  },
)

test('"~01" is the name "~1" and no slash', () => {
  expect(at({ '~1': 'x', '/': 'y' }, '/~01')).toBe('x')
})

test.each(['/constructor', '/__proto__', '/toString', '/foo/length'])(
  '%j finds nothing that the sender did not write',
  (pointer) => {
    expect(at({ foo: [] }, pointer)).toBeUndefined()
  },
)
