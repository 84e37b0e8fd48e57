import { createServer, type Server, type Socket } from 'node:net'
import { Aedes, type Client } from 'aedes'
import { Refusal } from '../../config/schema/refusal.js'
import type { Receive } from './message.js'

/**
 * Deepest topic. The site file allows 10 levels, yet a device with more is heard, refused and
 * shown like any other unknown topic: cutting it off would only make it come back for ever. Past
 * 100 the matcher throws, so there the connection is closed.
 */
const topicLevels = 100

/** Publishes of one connection that may be under way at once; the rest stays in its socket. */
const concurrency = 1000

/** A subscriber that takes nothing for so long is cut off, or it would hold all others up. */
const drain_ms = 10_000

/** Connections at once. A site of this program has hundreds of gateways, not thousands. */
const mostConnections = 2000

/**
 * The longest packet that is heard at all. A longer payload than decode takes (64 KiB) is still
 * heard, so that it can be kept and named; past this the connection is closed.
 */
const longestPacket_bytes = 1024 * 1024

/** On close, so long for what is under way to be committed and acknowledged. */
const goodbye_ms = 5000

export type Broker = {
  readonly port: number
  /** Devices connected now. */
  clients(): number
  /** Takes nothing new, waits for what is under way, closes. What was not acknowledged comes again. */
  close(): Promise<void>
}

/**
 * The embedded broker (MQTT 3.1 and 3.1.1), on loopback. A publish is acknowledged after
 * `receive` resolved, and never otherwise:
 *
 * - `receive` resolves (readings and refusals are on disk): PUBACK.
 * - `receive` rejects (Outage): no PUBACK, and the connection is closed. MQTT redelivers only on a
 *   new connection [MQTT-4.4.0-1]; kept open, a device's window would stall for good. The log has
 *   waited by then for its patience, so devices come back every 10 s, not in a storm.
 *
 * Bad content is no reason to reject: it would be sent again for ever.
 *
 * @param options.port     0 picks a free one
 * @param options.receive  given each publish; the receipt time is stamped there
 * @param options.onFault  told of each rejection that closed a connection
 * @throws Refusal 'port-in-use' and its like
 */
export const openBroker = async (options: {
  readonly host: string
  readonly port: number
  readonly receive: Receive
  readonly onFault?: (error: unknown) => void
}): Promise<Broker> => {
  let underWay = 0
  let closing = false
  let whenQuiet: (() => void) | null = null
  const bridges = new WeakSet<Client>()

  const aedes = await Aedes.createBroker({
    concurrency,
    drainTimeout: drain_ms,
    maxTopicLevels: topicLevels,
    preConnect(client, packet, done) {
      // Another broker's bridge, which says so in its CONNECT.
      if ('bridgeMode' in packet && packet.bridgeMode === true) bridges.add(client)
      // No session outlives its connection: what a subscriber misses would queue without a bound.
      // A publisher loses nothing by it: it sends again what was not acknowledged.
      packet.clean = true
      done(null, true)
    },
    authorizeSubscribe(_client, subscription, done) {
      // `#` alone and `$…` are for nobody: one frozen listener to all would hold the others up.
      done(null, /^(#|\$)/.test(subscription.topic) ? null : subscription)
    },
    /** Runs before PUBACK, and in parallel for the publishes of one client (protocols.md §0). */
    authorizePublish(client, packet, done) {
      if (packet.topic.startsWith('$'))
        return done(new Error('topics that begin with $ belong to the broker'))
      // Neither acknowledged nor refused: the connection closes in a moment, and it comes again.
      if (closing) return
      underWay += 1
      const { topic, payload } = packet
      const bytes = typeof payload === 'string' ? Buffer.from(payload) : payload
      // A device's retain flag asks a broker to keep its newest message; the message is fresh.
      // A bridge passes the flag on with old ones [MQTT-3.3.1-8].
      const retain = packet.retain && client !== null && bridges.has(client)
      // This broker keeps none: an unbounded number of topics would be an unbounded memory.
      packet.retain = false
      options
        .receive({ topic, payload: bytes, retain, broker: null })
        .then(
          () => done(),
          (error: unknown) => {
            options.onFault?.(error)
            done(error instanceof Error ? error : new Error(String(error)))
          },
        )
        .finally(() => {
          underWay -= 1
          if (underWay === 0) whenQuiet?.()
        })
    },
  })

  const server = createServer((socket) => {
    const client = aedes.handle(socket)
    socket.on('readable', () => {
      if (bufferedBytes(client) > longestPacket_bytes) socket.destroy()
    })
  })
  server.maxConnections = mostConnections
  const port = await listen(server, options.host, options.port)
  server.on('error', (error) => options.onFault?.(error)) // a connection that could not be taken

  return {
    port,
    clients: () => aedes.connectedClients,
    async close() {
      if (closing) return
      closing = true
      const stopped = new Promise<void>((resolve) => server.close(() => resolve()))
      if (underWay > 0) {
        await new Promise<void>((resolve) => {
          const late = setTimeout(resolve, goodbye_ms)
          whenQuiet = () => {
            clearTimeout(late)
            // The acknowledgements are written in this turn; let them leave first.
            setImmediate(resolve)
          }
        })
      }
      for (const socket of sockets(aedes)) socket.destroySoon()
      await new Promise<void>((resolve) => aedes.close(resolve))
      await stopped
    },
  }
}

/**
 * Bytes of a packet that has not ended yet. aedes has no limit of its own for this, and MQTT
 * allows 256 MiB; the parser's list is its private part, hence the test that holds us to it.
 */
const bufferedBytes = (client: Client): number =>
  (client as Client & { _parser?: { _list?: { length: number } } })._parser?._list?.length ?? 0

const sockets = (aedes: Aedes): Socket[] =>
  Object.values((aedes as Aedes & { clients: Record<string, Client> }).clients)
    .map((client) => client.conn)
    .filter((conn): conn is Socket => 'destroySoon' in conn)

const listen = (server: Server, host: string, port: number): Promise<number> =>
  new Promise((resolve, reject) => {
    server.once('error', (error: NodeJS.ErrnoException) => {
      const [code, problem] =
        error.code === 'EADDRINUSE'
          ? ['port-in-use', 'another program listens on this port']
          : ['cannot-listen', `the port cannot be opened (${error.message})`]
      reject(
        new Refusal(
          code,
          'HOARLINE_MQTT_PORT',
          port,
          problem,
          'stop that program, or give another port (0 picks a free one, "off" runs without a broker)',
          { cause: error },
        ),
      )
    })
    server.listen({ host, port }, () => {
      const address = server.address()
      resolve(typeof address === 'object' && address !== null ? address.port : port)
    })
  })
