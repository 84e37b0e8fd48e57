import { execFile } from 'node:child_process'
import { once } from 'node:events'
import { connect, createServer } from 'node:net'
import { promisify } from 'node:util'
import mqttPacket from 'mqtt-packet'
import { expect, onTestFinished, test } from 'vitest'
import { openBroker } from '../../server/mqtt/broker.js'
import { program, testNeeding } from '../needs.js'
import { device, failAll, heal, noFault, testIntake } from './intake.js'

const probes = [
  { id: 'P-07', source: { topic: 'site/cr2/p07', payload: 'senml' } },
  { id: 'N', source: { topic: 'n', payload: 'number' } },
  { id: 'J', source: { topic: 'j', payload: 'json', timeFormat: 'ms', seq: '/n' } },
]
const pack = '[{"n":"urn:dev:ow:10e2073a01080063","u":"Cel","v":-3.12}]'

test('a published SenML pack is in the log when its PUBACK comes', async () => {
  const { log, broker } = await testIntake(probes)
  const client = await device(broker.port)
  await client.publishAsync('site/cr2/p07', pack, { qos: 1 })
  expect(log.read(0, 0, 10)).toMatchObject([
    { probe: 'P-07', celsius: -3.12, quality: 'good', kept: 'new', offset: 1 },
  ])
})

test('while the disk is full nothing is acknowledged; when there is room again, all is', async () => {
  const fault = noFault()
  const { log, broker, nextOutage } = await testIntake(probes, { fault })
  const client = await device(broker.port)
  await client.publishAsync('n', '1', { qos: 1 })

  failAll(fault)
  const away = nextOutage()
  let acked = 0
  const sent = [2, 3, 4].map(async (n) => {
    await client.publishAsync('n', String(n), { qos: 1 })
    acked += 1
  })
  expect(await away).toMatchObject({ name: 'Outage', part: 'disk' })
  expect(acked).toBe(0)
  expect(log.outage()).not.toBeNull()

  const back = nextOutage()
  heal(fault)
  expect(await back).toBeNull()
  await Promise.all(sent)
  expect(log.read(0, 0, 10).map((r) => r.celsius)).toEqual([1, 2, 3, 4])
  expect(client.connected).toBe(true)
})

test('past its patience an outage closes the connection, and the device sends again', async () => {
  const fault = noFault()
  const { log, broker, nextOutage, faults } = await testIntake(probes, { fault, patience_ms: 1 })
  const client = await device(broker.port, { clientId: 'dev', clean: false })
  failAll(fault)
  const away = nextOutage()
  const closed = new Promise<void>((resolve) => client.once('close', () => resolve()))
  let acked = false
  const sent = client
    .publishAsync('j', `{"value":5,"time":${Date.now()},"n":1}`, { qos: 1 })
    .then(() => {
      acked = true
    })
  await away
  await closed
  expect(acked).toBe(false)
  expect(faults).toMatchObject([{ name: 'Outage' }])

  heal(fault)
  await sent
  expect(log.read(0, 0, 10)).toMatchObject([{ probe: 'J', celsius: 5, seq: 1 }])
  expect(log.outage()).toBeNull()
})

test('what cannot be used is acknowledged and kept: a refusal would come back for ever', async () => {
  const { log, broker } = await testIntake(probes)
  const client = await device(broker.port)
  const lost = new Promise((resolve) => client.once('close', () => resolve('closed')))
  const deep = Array.from({ length: 40 }, (_, i) => i).join('/')
  await Promise.all([
    client.publishAsync('site/cr2/p07', 'not senml', { qos: 1 }),
    client.publishAsync('nobody/knows', '4', { qos: 1 }),
    client.publishAsync(deep, '4', { qos: 1 }),
    client.publishAsync('n', 'x'.repeat(70_000), { qos: 1 }),
    client.publishAsync('n', '', { qos: 2 }),
  ])
  expect(log.counts().refusedByCode).toEqual({
    'not-json': 1,
    'unknown-topic': 2,
    'too-large': 1,
    empty: 1,
  })
  await client.publishAsync('n', '4', { qos: 1 })
  expect(await Promise.race([lost, 'open'])).toBe('open')
})

test('a packet past a megabyte closes the connection before it fills the memory', async () => {
  const { broker } = await testIntake(probes)
  const client = await device(broker.port, { reconnectPeriod: 0 })
  const closed = new Promise<void>((resolve) => client.once('close', () => resolve()))
  client.publish('n', 'x'.repeat(3_000_000), { qos: 1 })
  await closed
})

test('topics of the broker itself are for nobody, nor is a subscription to everything', async () => {
  const { broker } = await testIntake(probes)
  const client = await device(broker.port, { reconnectPeriod: 0 })
  await client.subscribeAsync('n')
  for (const filter of ['#', '$SYS/#'])
    await expect(client.subscribeAsync(filter)).rejects.toThrow('Subscribe error')
  const closed = new Promise<void>((resolve) => client.once('close', () => resolve()))
  client.publish('$SYS/x/new/clients', 'other', { qos: 1 })
  await closed
})

/** Another broker's bridge: a client that says so in its CONNECT, as mosquitto does. */
const bridgeTo = async (port: number) => {
  const socket = connect(port, '127.0.0.1')
  onTestFinished(() => void socket.destroy())
  const parser = mqttPacket.parser()
  socket.on('data', (chunk) => void parser.parse(chunk))
  const next = async () => ((await once(parser, 'packet')) as [mqttPacket.Packet])[0].cmd
  socket.write(
    mqttPacket.generate({
      cmd: 'connect',
      clientId: 'bridge',
      protocolId: 'MQTT',
      protocolVersion: 4,
      bridgeMode: true,
    } as mqttPacket.IConnectPacket),
  )
  expect(await next()).toBe('connack')
  return {
    async publish(payload: string, retain: boolean) {
      const head = { cmd: 'publish', topic: 'n', qos: 1, dup: false, messageId: 1 } as const
      socket.write(mqttPacket.generate({ ...head, payload, retain }))
      expect(await next()).toBe('puback')
    },
  }
}

test('nothing is queued for a subscriber that is away', async () => {
  const { broker } = await testIntake(probes)
  const asks = { clientId: 'screen', clean: false, reconnectPeriod: 0 }
  const before = await device(broker.port, asks)
  await before.subscribeAsync('n', { qos: 1 })
  await before.endAsync()
  const publisher = await device(broker.port)
  await publisher.publishAsync('n', '1', { qos: 1 })
  const after = await device(broker.port, asks)
  const came: string[] = []
  const second = new Promise<void>((resolve) => {
    after.on('message', (_topic, payload) => {
      came.push(payload.toString())
      if (payload.toString() === '2') resolve()
    })
  })
  await after.subscribeAsync('n', { qos: 1 })
  await publisher.publishAsync('n', '2', { qos: 1 })
  await second
  expect(came).toEqual(['2'])
})

test("a device's retain flag makes its message no less fresh; a bridge's marks an old copy", async () => {
  const { log, broker } = await testIntake(probes)
  const plain = await device(broker.port)
  await plain.publishAsync('n', '4', { qos: 1, retain: true })
  const bridge = await bridgeTo(broker.port)
  await bridge.publish('5', true)
  await bridge.publish('6', false)
  expect(log.read(0, 0, 10).map((r) => [r.celsius, r.quality])).toEqual([
    [4, 'good'],
    [5, 'retained'],
    [6, 'good'],
  ])
})

test('a thousand publishes of one device are under way together', async () => {
  const { log, broker } = await testIntake(probes)
  const client = await device(broker.port)
  const t_ms = Date.now()
  await Promise.all(
    Array.from({ length: 1000 }, (_, n) =>
      client.publishAsync('j', JSON.stringify({ value: n / 100, time: t_ms, n }), { qos: 1 }),
    ),
  )
  expect(log.counts()).toMatchObject({ readings: 1000, duplicates: 0, conflicts: 0 })
})

test('two probes on one topic each get their own', async () => {
  const both = [
    { id: 'A', source: { topic: 'rack', payload: 'senml', name: 'rack:a' } },
    { id: 'B', source: { topic: 'rack', payload: 'senml', name: 'rack:b' } },
  ]
  const { log, broker } = await testIntake(both)
  const client = await device(broker.port)
  await client.publishAsync(
    'rack',
    '[{"bn":"rack:","bu":"Cel","n":"a","v":1},{"n":"b","v":2},{"n":"c","v":3}]',
    { qos: 1 },
  )
  expect(log.read(0, 0, 10).map((r) => [r.probe, r.celsius])).toEqual([
    ['A', 1],
    ['B', 2],
  ])
  expect(log.counts().refusedByCode).toEqual({ 'unknown-name': 1 })
})

test('a port in use is refused with the setting to change', async () => {
  const taken = createServer().listen(0, '127.0.0.1')
  await once(taken, 'listening')
  onTestFinished(() => void taken.close())
  const { port } = taken.address() as { port: number }
  await expect(
    openBroker({ host: '127.0.0.1', port, receive: async () => {} }),
  ).rejects.toMatchObject({ code: 'port-in-use', field: 'HOARLINE_MQTT_PORT', value: port })
})

test('closing lets what is under way be committed and acknowledged', async () => {
  let commit = () => {}
  let came: (() => void) | null = null
  const arrived = new Promise<void>((resolve) => {
    came = resolve
  })
  const broker = await openBroker({
    host: '127.0.0.1',
    port: 0,
    receive: () =>
      new Promise<void>((resolve) => {
        commit = resolve
        came?.()
      }),
  })
  const client = await device(broker.port, { reconnectPeriod: 0 })
  const sent = client.publishAsync('n', '1', { qos: 1 })
  await arrived
  const closed = broker.close()
  commit()
  await sent
  await closed
})

test('bytes that are no MQTT close their own connection and no other', async () => {
  const { log, broker } = await testIntake(probes)
  const client = await device(broker.port)
  const strange = connect(broker.port, '127.0.0.1')
  const closed = once(strange, 'close')
  strange.on('error', () => {})
  strange.write('GET / HTTP/1.1\r\n\r\n')
  await closed
  const early = connect(broker.port, '127.0.0.1')
  const hungUp = once(early, 'close')
  early.on('error', () => {})
  // A PUBLISH before any CONNECT [MQTT-3.1.0-1].
  early.write(
    mqttPacket.generate({
      cmd: 'publish',
      topic: 'n',
      payload: '1',
      qos: 0,
      dup: false,
      retain: false,
    }),
  )
  await hungUp
  await client.publishAsync('n', '1', { qos: 1 })
  expect(log.counts().readings).toBe(1)
})

testNeeding(
  program('mosquitto_pub') === null ? 'mosquitto_pub (mosquitto-clients)' : null,
  'mosquitto_pub publishes SenML and it is in the log',
  async () => {
    const { log, broker } = await testIntake(probes)
    const got = new Promise<void>((resolve) => {
      const look = () => (log.counts().readings > 0 ? resolve() : setImmediate(look))
      look()
    })
    await promisify(execFile)(program('mosquitto_pub') ?? '', [
      ...['-h', '127.0.0.1', '-p', String(broker.port), '-t', 'site/cr2/p07', '-q', '0'],
      ...['-m', pack],
    ])
    await got
    expect(log.read(0, 0, 1)).toMatchObject([{ probe: 'P-07', celsius: -3.12, quality: 'good' }])
  },
)
