import { connect } from 'node:net'
import { parentPort, workerData } from 'node:worker_threads'
import { generate, parser } from 'mqtt-packet'
import { temperature_C } from './site.js'

/**
 * Publishes SenML at QoS 1 as fast as it is acknowledged, by one connection with a window. Without a
 * time, as live readings: times made up for a flood would cross between connections, and then the
 * putting in order would be measured, not the way.
 */

const window = 500
const { port, items, minutes, name } = workerData as {
  port: number
  items: readonly number[]
  minutes: number
  name: string
}

const packets = Array.from({ length: minutes }, (_, k) =>
  items.map((i, n) =>
    generate({
      cmd: 'publish',
      topic: `bench/${i}`,
      payload: JSON.stringify([
        {
          n: `urn:dev:ow:bench-${i}`,
          u: 'Cel',
          v: temperature_C(i, k),
        },
      ]),
      qos: 1,
      messageId: ((k * items.length + n) % 65_000) + 1,
      dup: false,
      retain: false,
    }),
  ),
).flat()

const socket = connect(port, '127.0.0.1')
const reader = parser()
let sent = 0
let acked = 0
const pump = () => {
  const batch: Buffer[] = []
  while (sent < packets.length && sent - acked < window) {
    const packet = packets[sent]
    if (packet !== undefined) batch.push(packet)
    sent += 1
  }
  if (batch.length > 0) socket.write(Buffer.concat(batch))
}
reader.on('packet', (packet) => {
  if (packet.cmd === 'connack') {
    parentPort?.postMessage('ready')
    return
  }
  if (packet.cmd !== 'puback') return
  acked += 1
  if (acked === packets.length) {
    parentPort?.postMessage('done')
    socket.end()
  } else if (sent - acked < window / 2) pump()
})
socket.on('data', (bytes) => reader.parse(bytes))
socket.write(
  generate({
    cmd: 'connect',
    clientId: name,
    protocolId: 'MQTT',
    protocolVersion: 4,
    clean: true,
    keepalive: 60,
  }),
)
parentPort?.on('message', pump)
