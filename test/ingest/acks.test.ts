import fc from 'fast-check'
import { expect, test } from 'vitest'
import { acksOf } from '../../server/mqtt/acks.js'
import { backOff_ms } from '../../server/mqtt/backOff.js'

const turn = () => new Promise((resolve) => setImmediate(resolve))

/** Message ids in a write of PUBACKs. */
const ids = (bytes: Buffer): number[] =>
  Array.from({ length: bytes.length / 4 }, (_, i) => {
    expect([...bytes.subarray(i * 4, i * 4 + 2)]).toEqual([0x40, 2])
    return bytes.readUInt16BE(i * 4 + 2)
  })

const recorded = (most = 1000) => {
  const writes: number[][] = []
  const flow: string[] = []
  const acks = acksOf({
    send: (bytes) => void writes.push(ids(bytes)),
    most,
    pause: () => void flow.push('pause'),
    resume: () => void flow.push('resume'),
  })
  return { acks, writes, flow }
}

test('the acks of one commit leave in one write', async () => {
  const { acks, writes } = recorded()
  const done = [1, 2, 65_535].map((id) => acks.expect(id))
  for (const say of done) say()
  await turn()
  expect(writes).toEqual([[1, 2, 65_535]])
})

test('law: acks leave in the order in which publishes came [MQTT-4.6.0-2]', async () => {
  const order = fc.uniqueArray(fc.integer({ min: 1, max: 65_535 }), { maxLength: 30 })
  await fc.assert(
    fc.asyncProperty(
      order.chain((came) =>
        fc.tuple(fc.constant(came), fc.shuffledSubarray(came, { minLength: came.length })),
      ),
      async ([came, finished]) => {
        const { acks, writes } = recorded()
        const say = new Map(came.map((id) => [id, acks.expect(id)]))
        for (const id of finished) {
          say.get(id)?.()
          await turn()
        }
        expect(writes.flat()).toEqual(came)
      },
    ),
    { numRuns: 100, seed: 20260105 },
  )
})

test('nothing of a connection that is over is acknowledged', async () => {
  const { acks, writes } = recorded()
  const say = acks.expect(1)
  say()
  acks.drop()
  await turn()
  expect(writes).toEqual([])
})

test('reading pauses at the limit and goes on when half is done', async () => {
  const { acks, flow } = recorded(4)
  const say = [1, 2, 3, 4].map((id) => acks.expect(id))
  expect(flow).toEqual(['pause'])
  say[0]?.()
  await turn()
  expect(flow).toEqual(['pause'])
  say[1]?.()
  await turn()
  expect(flow).toEqual(['pause', 'resume'])
})

test('the back-off doubles up to a minute, with full jitter', () => {
  const most = [0, 1, 2, 5, 6, 30].map((n) => backOff_ms(n, 0.999_999))
  expect(most.map((ms) => Math.round(ms / 1000))).toEqual([1, 2, 4, 32, 60, 60])
  expect(backOff_ms(5, 0)).toBe(0)
})
