import { spawn } from 'node:child_process'
import { once } from 'node:events'
import { writeFileSync } from 'node:fs'
import { createServer } from 'node:net'
import { join } from 'node:path'
import { expect, onTestFinished, test } from 'vitest'
import { listenTo, type OutsideOptions, type OutsideStatus } from '../../server/mqtt/outside.js'
import { program, testNeeding } from '../needs.js'
import { device, failAll, heal, noFault, receiver, temporaryFolder, testLog } from './intake.js'
import { startOtherBroker } from './processes.js'
import { connack, publish, scriptedBroker } from './scriptedBroker.js'

const probes = [{ id: 'N', source: { topic: 'n', payload: 'json', timeFormat: 'ms', seq: '/n' } }]
const numbered = (n: number) => JSON.stringify({ value: n / 10, time: Date.now(), n })

/** A client that is closed after the test, and promises for what its status becomes. */
const listening = (port: number, over: Partial<OutsideOptions> = {}) => {
  const waiting: { is: (s: OutsideStatus) => boolean; resolve: (s: OutsideStatus) => void }[] = []
  const subscribed: string[][] = []
  const outside = listenTo({
    name: 'plant',
    host: '127.0.0.1',
    port,
    user: null,
    password: null,
    clientId: 'hoarline-test',
    filters: ['n'],
    subscribed: [],
    onSubscribed: (filters) => void subscribed.push([...filters]),
    receive: async () => {},
    onStatus: (status) => {
      for (const w of waiting.filter(({ is }) => is(status))) {
        waiting.splice(waiting.indexOf(w), 1)
        w.resolve(status)
      }
    },
    firstRetry_ms: 10,
    ...over,
  })
  onTestFinished(() => outside.close())
  const until = (is: (s: OutsideStatus) => boolean): Promise<OutsideStatus> =>
    is(outside.status())
      ? Promise.resolve(outside.status())
      : new Promise((resolve) => void waiting.push({ is, resolve }))
  return {
    outside,
    subscribed,
    connected: () => until((s) => s.state === 'connected'),
    away: () => until((s) => s.state === 'away'),
    until,
  }
}

/** A log behind the client; resolves once so many readings are in it. */
const kept = async (options: Parameters<typeof testLog>[0] = {}) => {
  const { log, nextOutage } = await testLog(options)
  const counts = (n: number) =>
    new Promise<void>((resolve) => {
      const look = () => (log.counts().readings >= n ? resolve() : setImmediate(look))
      look()
    })
  return { log, nextOutage, counts, receive: receiver(log, probes) }
}

const otherBroker = async (port = 0) => {
  const broker = await startOtherBroker(port)
  onTestFinished(() => broker.kill())
  return broker
}

test('hears a broker that speaks 3.1.1 alone, and acknowledges after commit', async () => {
  const broker = await otherBroker()
  const fault = noFault()
  const { log, receive, nextOutage, counts } = await kept({ fault })
  const { connected } = listening(broker.port, { receive })
  await connected()
  const gateway = await device(broker.port)
  const acked: string[] = []
  const first = new Promise<void>((resolve) => {
    broker.onAck((client) => {
      acked.push(client)
      resolve()
    })
  })
  failAll(fault)
  const outage = nextOutage()
  await gateway.publishAsync('n', numbered(1), { qos: 1 })
  expect(await outage).not.toBeNull()
  expect(acked).toEqual([])
  heal(fault)
  await first
  await counts(1)
  expect(log.read(0, 0, 10)).toMatchObject([{ probe: 'N', celsius: 0.1, seq: 1, quality: 'good' }])
})

test('a broker that dies is told as away, with what to do, and is heard again when it is back', async () => {
  const broker = await otherBroker()
  const { log, receive, counts } = await kept()
  const { connected, away, outside } = listening(broker.port, { receive })
  await connected()
  await broker.kill()
  const gone = await away()
  expect(gone.why).toContain(`broker "plant" (127.0.0.1:${broker.port})`)
  expect(gone.since_ms).toBeLessThanOrEqual(Date.now())

  await otherBroker(broker.port)
  await connected()
  expect(outside.status().why).toBeNull()
  const gateway = await device(broker.port)
  await gateway.publishAsync('n', numbered(2), { qos: 1 })
  await counts(1)
  expect(log.read(0, 0, 10)).toMatchObject([{ seq: 2 }])
})

test('nothing that listens there is told with the setting to correct', async () => {
  const server = createServer().listen(0, '127.0.0.1')
  await once(server, 'listening')
  const { port } = server.address() as { port: number }
  server.close()
  const { until } = listening(port)
  const status = await until((s) => s.why !== null)
  expect(status).toMatchObject({ state: 'away' })
  expect(status.why).toContain('nothing listens there')
  expect(status.why).toContain('HOARLINE_MQTT_URL')
})

test('a retained message is a copy of old: kept, but not as fresh', async () => {
  const broker = await otherBroker()
  const gateway = await device(broker.port)
  await gateway.publishAsync('n', numbered(1), { qos: 1, retain: true })
  const { log, receive, counts } = await kept()
  const { connected } = listening(broker.port, { receive })
  await connected()
  await counts(1)
  await gateway.publishAsync('n', numbered(2), { qos: 1, retain: true })
  await counts(2)
  // The second came as it was published, so it is fresh, whatever its flag.
  expect(log.read(0, 0, 10).map((r) => [r.seq, r.quality])).toEqual([
    [1, 'retained'],
    [2, 'good'],
  ])
})

test('asks for a session that lasts, in MQTT 5, and subscribes with QoS 1', async () => {
  const broker = await scriptedBroker()
  const { connected, subscribed } = listening(broker.port, { user: 'u', password: 'p' })
  const one = await broker.connection()
  expect(await one.next()).toMatchObject({
    cmd: 'connect',
    protocolVersion: 5,
    clientId: 'hoarline-test',
    clean: false,
    username: 'u',
    password: Buffer.from('p'),
    properties: { sessionExpiryInterval: 604_800 },
  })
  one.send(connack())
  expect(await one.next()).toMatchObject({
    cmd: 'subscribe',
    subscriptions: [{ topic: 'n', qos: 1, rh: 1, rap: false }],
  })
  one.send({ cmd: 'suback', messageId: 1, granted: [1] })
  await connected()
  expect(subscribed).toEqual([['n']])
})

test('does not subscribe again where the broker kept the session, and drops filters that went', async () => {
  const broker = await scriptedBroker()
  listening(broker.port, { filters: ['n', 'm'], subscribed: ['n', 'old'] })
  const one = await broker.connection()
  await one.next()
  one.send(connack({ sessionPresent: true }))
  expect(await one.next()).toMatchObject({ cmd: 'unsubscribe', unsubscriptions: ['old'] })
  expect(await one.next()).toMatchObject({ cmd: 'subscribe' })
  one.send({ cmd: 'suback', messageId: 1, granted: [1, 1] })
  one.socket.destroy()

  const two = await broker.connection()
  await two.next()
  two.send(connack({ sessionPresent: true }))
  two.send(publish(7, '1'))
  // The next thing it sends is the ack, so there was no SUBSCRIBE.
  expect(await two.next()).toMatchObject({ cmd: 'puback', messageId: 7 })
})

test('an ack of an old connection is not sent on the new one', async () => {
  const broker = await scriptedBroker()
  const commits: (() => void)[] = []
  listening(broker.port, {
    receive: () => new Promise<void>((resolve) => void commits.push(resolve)),
  })
  const one = await broker.connection()
  await one.next()
  one.send(connack())
  await one.next()
  one.send({ cmd: 'suback', messageId: 1, granted: [1] })
  one.send(publish(1, 'a'))
  one.send(publish(2, 'b'))
  while (commits.length < 2) await new Promise((resolve) => setImmediate(resolve))
  one.socket.destroy()

  const two = await broker.connection()
  await two.next()
  commits[0]?.() // of the old connection; the broker has given number 1 to another message
  commits[1]?.()
  two.send(connack({ sessionPresent: true }))
  two.send(publish(9, 'b', { dup: true }))
  while (commits.length < 3) await new Promise((resolve) => setImmediate(resolve))
  commits[2]?.()
  expect(await two.next()).toMatchObject({ cmd: 'puback', messageId: 9 })
})

test('what cannot be kept is not acknowledged, and the broker is made to send it again', async () => {
  const broker = await scriptedBroker()
  let tries = 0
  const { until } = listening(broker.port, {
    receive: async () => {
      tries += 1
      if (tries === 1) throw new Error('the disk takes no more')
    },
  })
  const one = await broker.connection()
  await one.next()
  one.send(connack())
  await one.next()
  one.send(publish(1, 'a'))
  const hungUp = once(one.socket, 'close')
  expect((await until((s) => s.state === 'away')).why).toContain('the disk takes no more')
  await hungUp
  const two = await broker.connection()
  await two.next()
  two.send(connack({ sessionPresent: true }))
  await two.next()
  two.send(publish(1, 'a', { dup: true }))
  expect(await two.next()).toMatchObject({ cmd: 'puback', messageId: 1 })
})

test.each([
  { reasonCode: 0x86, says: 'user or password' },
  { reasonCode: 0x87, says: 'access list' },
  { reasonCode: 0x88, says: 'not available' },
  { reasonCode: 0x8a, says: 'code 138' },
])('a broker that refuses with $reasonCode is told: $says', async ({ reasonCode, says }) => {
  const broker = await scriptedBroker()
  const { until } = listening(broker.port)
  const one = await broker.connection()
  await one.next()
  one.send(connack({ reasonCode }))
  expect((await until((s) => s.why !== null)).why).toContain(says)
})

test('a broker that refuses MQTT 5, by word or by hanging up, is asked in 3.1.1', async () => {
  const broker = await scriptedBroker()
  listening(broker.port)
  const one = await broker.connection()
  expect(await one.next()).toMatchObject({ protocolVersion: 5 })
  one.socket.write(Buffer.from([0x20, 2, 0, 1])) // CONNACK of 3.1.1: unacceptable version
  const two = await broker.connection()
  expect(await two.next()).toMatchObject({ protocolVersion: 4, clean: false })

  const silent = await scriptedBroker()
  listening(silent.port)
  const a = await silent.connection()
  await a.next()
  a.socket.destroy()
  expect(await (await silent.connection()).next()).toMatchObject({ protocolVersion: 4 })
})

test('a filter that the broker refuses is named, and the others are heard', async () => {
  const broker = await scriptedBroker()
  const { until, subscribed } = listening(broker.port, { filters: ['n', 'secret'] })
  const one = await broker.connection()
  await one.next()
  one.send(connack())
  await one.next()
  one.send({ cmd: 'suback', messageId: 1, granted: [1, 0x87] })
  const status = await until((s) => s.why !== null)
  expect(status).toMatchObject({ state: 'connected' })
  expect(status.why).toContain('secret')
  expect(subscribed).toEqual([])
})

test('a broker that falls silent is left, and asked again', async () => {
  const broker = await scriptedBroker()
  const { until } = listening(broker.port)
  const one = await broker.connection()
  await one.next()
  one.send(connack({ properties: { serverKeepAlive: 1 } }))
  await one.next()
  expect((await until((s) => s.state === 'away')).why).toContain('does not answer any more')
  expect(await (await broker.connection()).next()).toMatchObject({ cmd: 'connect' })
})

test('closing acknowledges what is under way and says goodbye', async () => {
  const broker = await scriptedBroker()
  let commit = () => {}
  const { outside } = listening(broker.port, {
    receive: () =>
      new Promise<void>((resolve) => {
        commit = resolve
      }),
  })
  const one = await broker.connection()
  await one.next()
  one.send(connack())
  await one.next()
  const noop = commit
  one.send(publish(5, 'a'))
  while (commit === noop) await new Promise((resolve) => setImmediate(resolve))
  const closed = outside.close()
  commit()
  expect(await one.next()).toMatchObject({ cmd: 'puback', messageId: 5 })
  expect(await one.next()).toMatchObject({ cmd: 'disconnect' })
  one.socket.end()
  await closed
})

testNeeding(
  program('mosquitto') === null ? 'mosquitto' : null,
  'hears mosquitto over MQTT 5, and what it kept for us while we were away',
  async () => {
    const folder = temporaryFolder()
    const probe = createServer().listen(0, '127.0.0.1')
    await once(probe, 'listening')
    const { port } = probe.address() as { port: number }
    probe.close()
    await once(probe, 'close')
    const config = join(folder, 'mosquitto.conf')
    writeFileSync(config, `listener ${port} 127.0.0.1\nallow_anonymous true\n`)
    const mosquitto = spawn(program('mosquitto') ?? '', ['-c', config], { stdio: 'ignore' })
    onTestFinished(() => void mosquitto.kill('SIGKILL'))

    const { log, receive, counts } = await kept()
    const first = listening(port, { receive })
    await first.connected()
    const gateway = await device(port, { protocolVersion: 5 })
    await gateway.publishAsync('n', numbered(1), { qos: 1 })
    await counts(1)
    await first.outside.close()
    for (let n = 2; n <= 50; n++) await gateway.publishAsync('n', numbered(n), { qos: 1 })

    const second = listening(port, { receive, subscribed: ['n'] })
    await second.connected()
    await counts(50)
    expect(log.counts()).toMatchObject({ readings: 50, duplicates: 0, conflicts: 0 })
  },
)
