import { createServer, type Socket } from 'node:net'
import mqtt, { type Packet } from 'mqtt-packet'
import { onTestFinished } from 'vitest'

type Connection = {
  readonly socket: Socket
  /** The next packet that the client sends. */
  next(): Promise<Packet>
  send(packet: Packet): void
}

/**
 * A broker that says exactly what a test tells it to: faults of brokers that no real one shows on
 * request. Speaks the version of the client's CONNECT.
 */
export const scriptedBroker = async () => {
  const connections: Connection[] = []
  const waiting: ((c: Connection) => void)[] = []
  const server = createServer((socket) => {
    const parser = mqtt.parser()
    const came: Packet[] = []
    const wanted: ((p: Packet) => void)[] = []
    let version = 4
    parser.on('packet', (packet) => {
      if (packet.cmd === 'connect') version = packet.protocolVersion ?? 4
      const want = wanted.shift()
      if (want === undefined) came.push(packet)
      else want(packet)
    })
    socket.on('data', (chunk) => void parser.parse(chunk))
    socket.on('error', () => {})
    const connection: Connection = {
      socket,
      next: () =>
        new Promise((resolve) => {
          const packet = came.shift()
          if (packet === undefined) wanted.push(resolve)
          else resolve(packet)
        }),
      send: (packet) => void socket.write(mqtt.generate(packet, { protocolVersion: version })),
    }
    const want = waiting.shift()
    if (want === undefined) connections.push(connection)
    else want(connection)
  })
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
  onTestFinished(() => void server.close())
  return {
    port: (server.address() as { port: number }).port,
    /** The next connection that a client opens. */
    connection: (): Promise<Connection> =>
      new Promise((resolve) => {
        const connection = connections.shift()
        if (connection === undefined) waiting.push(resolve)
        else resolve(connection)
      }),
  }
}

export const connack = (over: object = {}): Packet =>
  ({ cmd: 'connack', reasonCode: 0, returnCode: 0, sessionPresent: false, ...over }) as Packet

export const publish = (messageId: number, payload: string, over: object = {}): Packet =>
  ({
    cmd: 'publish',
    topic: 'n',
    payload,
    qos: 1,
    dup: false,
    retain: false,
    messageId,
    ...over,
  }) as Packet
