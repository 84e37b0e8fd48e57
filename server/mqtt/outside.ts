import { connect as connectPlain } from 'node:net'
import type { Duplex } from 'node:stream'
import mqtt, { type IConnackPacket, type IPublishPacket, type Packet } from 'mqtt-packet'
import { type Acks, acksOf } from './acks.js'
import { backOff_ms } from './backOff.js'
import { isVersionRefusal, refusedConnect } from './connack.js'
import type { Receive } from './message.js'

/** Un-acknowledged publishes that are held; past it the socket is not read until half are done. */
const mostUnacknowledged = 2000

/** The longest packet that is heard; MQTT 5 brokers are told so, others are cut off. */
const longestPacket_bytes = 1024 * 1024

/** We speak at least this often, and expect an answer within half of it. */
const keepalive_s = 30

/** How long a broker is asked to keep our queue while we are away: a week. */
const sessionExpiry_s = 7 * 86_400

/** A broker that has not taken our CONNECT by then is not there. */
const connect_ms = 10_000

/** After our DISCONNECT the broker has so long to hang up. */
const goodbye_ms = 1000

/** A connection that lasted so long was a good one: the next back-off begins anew. */
const goodAfter_ms = 10_000

export type OutsideStatus = {
  readonly name: string
  readonly state: 'connecting' | 'connected' | 'away'
  /** Host's clock, UTC ms, since when. */
  readonly since_ms: number
  /** What is wrong and what to do, in words; null when all is well. */
  readonly why: string | null
}

export type Outside = {
  status(): OutsideStatus
  /** Takes nothing new, waits for what is under way, disconnects. The broker keeps the session. */
  close(): Promise<void>
}

export type OutsideOptions = {
  readonly name: string
  readonly host: string
  readonly port: number
  readonly user: string | null
  readonly password: string | null
  /** Stable over restarts and used by nobody else: the broker's queue for us hangs on it. */
  readonly clientId: string
  readonly filters: readonly string[]
  /** Filters of the last SUBSCRIBE of this client id, from `onSubscribed`; [] at first. */
  readonly subscribed: readonly string[]
  readonly onSubscribed: (filters: readonly string[]) => void
  readonly receive: Receive
  readonly onStatus: (status: OutsideStatus) => void
  /** Opens the way to the broker: a plain socket here, TLS when a site has it. */
  readonly connect?: (host: string, port: number) => Duplex
  /** 0 ≤ r < 1, for the jitter. */
  readonly random?: () => number
  readonly firstRetry_ms?: number
}

/**
 * Listens to somebody else's broker, with the guarantee of our own: PUBACK after commit.
 *
 * A thin client, since a full one acknowledges one message at a time (architecture.md §3). Here
 * publishes are under way in parallel, acknowledged in the order they came [MQTT-4.6.0-2], the
 * acks of one commit in one write. Every connection has a generation; what belongs to an old one
 * is dropped, as the broker sends it again. MQTT 5 is tried first, then 3.1.1.
 */
export const listenTo = (options: OutsideOptions): Outside => {
  const { name, host, port } = options
  const random = options.random ?? Math.random
  const open = options.connect ?? ((h: string, p: number) => connectPlain({ host: h, port: p }))

  let status: OutsideStatus = { name, state: 'connecting', since_ms: Date.now(), why: null }
  let generation = 0
  let version: 4 | 5 = 5
  let failures = 0
  let subscribed = options.subscribed
  let closing = false
  let current: { close(): Promise<void> } | null = null
  let retry: NodeJS.Timeout | null = null

  const say = (state: OutsideStatus['state'], why: string | null) => {
    if (status.state === state && status.why === why) return
    const since_ms = status.state === state ? status.since_ms : Date.now()
    status = { name, state, since_ms, why }
    options.onStatus(status)
  }

  const again = (why: string | null) => {
    current = null
    if (closing) return
    if (why === null) return connect() // another version of MQTT, at once
    say('away', `broker "${name}" (${host}:${port}): ${why}`)
    const wait_ms = backOff_ms(failures, random(), options.firstRetry_ms)
    failures += 1
    retry = setTimeout(connect, wait_ms)
  }

  const connect = () => {
    retry = null
    generation += 1
    const mine = generation
    const born_ms = performance.now()
    const socket = open(host, port)
    const parser = mqtt.parser({ protocolVersion: version })
    const timers = new Set<NodeJS.Timeout>()
    let heard_ms = born_ms
    let done = false
    let opened = false
    let answered = false

    const write = (packet: Packet) => {
      if (!done) socket.write(mqtt.generate(packet, { protocolVersion: version }))
    }
    const stop = (reason: string | null) => {
      if (done) return
      done = true
      for (const timer of timers) clearTimeout(timer)
      acks.drop()
      socket.destroy()
      if (performance.now() - born_ms > goodAfter_ms) failures = 0
      // Some old brokers hang up on MQTT 5 without a word.
      if (opened && !answered && reason !== null) version = version === 5 ? 4 : 5
      if (mine === generation) again(reason)
    }
    const bye = (): Promise<void> => {
      if (done) return Promise.resolve()
      done = true
      for (const timer of timers) clearTimeout(timer)
      acks.drop()
      const late = setTimeout(() => socket.destroy(), goodbye_ms)
      const closed = new Promise<void>((resolve) => socket.once('close', () => resolve()))
      socket.end(mqtt.generate({ cmd: 'disconnect' }, { protocolVersion: version }))
      socket.resume() // what still comes is not acknowledged, and comes again
      return closed.finally(() => clearTimeout(late))
    }
    const acks: Acks = acksOf({
      send: (bytes) => void (done || socket.write(bytes)),
      most: mostUnacknowledged,
      pause: () => socket.pause(),
      resume: () => socket.resume(),
    })

    const onConnack = (packet: IConnackPacket) => {
      answered = true
      const { code, text } = refusedConnect(packet)
      if (code !== 0) {
        if (!isVersionRefusal(code) || version === 4) return stop(text)
        version = 4
        return stop(null)
      }
      const keep_s = packet.properties?.serverKeepAlive ?? keepalive_s
      beat(keep_s === 0 ? keepalive_s : keep_s)
      const same =
        packet.sessionPresent && JSON.stringify(subscribed) === JSON.stringify(options.filters)
      // Subscribing again would bring every retained message again, so only where it is needed.
      if (same || options.filters.length === 0) return say('connected', null)
      const gone = packet.sessionPresent
        ? subscribed.filter((f) => !options.filters.includes(f))
        : []
      if (gone.length > 0) write({ cmd: 'unsubscribe', messageId: 2, unsubscriptions: gone })
      write({
        cmd: 'subscribe',
        messageId: 1,
        subscriptions: options.filters.map((topic) =>
          // QoS 1: 2 adds state and nothing else, the log drops duplicates. rh 1: retained
          // messages only where the subscription is new. rap false: the flag then marks a stored
          // copy and nothing else.
          version === 5 ? { topic, qos: 1, nl: false, rap: false, rh: 1 } : { topic, qos: 1 },
        ),
      })
    }

    const onSuback = (granted: readonly (number | object)[]) => {
      const refused = options.filters.filter((_, i) => Number(granted[i] ?? 0x80) >= 0x80)
      if (refused.length === 0) {
        subscribed = options.filters
        options.onSubscribed(subscribed)
        return say('connected', null)
      }
      // The rest is heard. Not remembered, so that the next connection asks again.
      say(
        'connected',
        `broker "${name}" does not let us hear ${refused.join(', ')}: check its access list`,
      )
    }

    const onPublish = (packet: IPublishPacket) => {
      const payload =
        typeof packet.payload === 'string' ? Buffer.from(packet.payload) : packet.payload
      const { topic, retain, qos, messageId } = packet
      const ack = qos > 0 && messageId !== undefined ? acks.expect(messageId) : null
      options.receive({ topic, payload, retain, broker: name }).then(
        () => ack?.(),
        (error: unknown) => {
          // Not acknowledged, so the broker sends it again, but only on a new connection.
          if (ack !== null)
            stop(
              `what it sends cannot be kept now (${error instanceof Error ? error.message : error})`,
            )
        },
      )
    }

    const beat = (keep_s: number) => {
      const timer = setInterval(() => {
        if (performance.now() - heard_ms > keep_s * 1500) stop('it does not answer any more')
        else write({ cmd: 'pingreq' })
      }, keep_s * 500)
      timers.add(timer)
    }

    parser.on('packet', (packet) => {
      if (done) return
      if (packet.cmd === 'publish') onPublish(packet)
      else if (packet.cmd === 'connack') {
        clearTimeout(patience)
        onConnack(packet)
      } else if (packet.cmd === 'suback') onSuback(packet.granted)
      else if (packet.cmd === 'disconnect')
        stop(`it closed the connection (code ${packet.reasonCode ?? 0})`)
    })
    parser.on('error', (error: Error) => stop(`it does not speak MQTT here (${error.message})`))

    socket.on('data', (chunk: Buffer) => {
      if (done) return
      heard_ms = performance.now()
      // What stays with the parser is a packet that has not ended.
      if (parser.parse(chunk) > longestPacket_bytes)
        stop(`it sends a packet of more than ${longestPacket_bytes} bytes`)
    })
    socket.on('error', (error: NodeJS.ErrnoException) =>
      stop(
        error.code === 'ECONNREFUSED'
          ? 'nothing listens there: start it, or correct HOARLINE_MQTT_URL'
          : `it cannot be reached (${error.message})`,
      ),
    )
    socket.on('close', () => stop('it closed the connection'))
    socket.on('connect', () => {
      opened = true
    })

    const patience = setTimeout(() => stop('it does not answer'), connect_ms)
    timers.add(patience)
    write({
      cmd: 'connect',
      protocolId: 'MQTT',
      protocolVersion: version,
      clientId: options.clientId,
      // The session stays with the broker: what is published while we are away waits there.
      clean: false,
      keepalive: keepalive_s,
      ...(options.user === null ? {} : { username: options.user }),
      ...(options.password === null ? {} : { password: Buffer.from(options.password) }),
      ...(version === 5
        ? {
            properties: {
              sessionExpiryInterval: sessionExpiry_s,
              maximumPacketSize: longestPacket_bytes,
              receiveMaximum: mostUnacknowledged,
            },
          }
        : {}),
    })
    current = {
      async close() {
        socket.pause()
        await acks.quiet()
        await bye()
      },
    }
  }

  connect()
  return {
    status: () => status,
    async close() {
      closing = true
      if (retry !== null) clearTimeout(retry)
      await current?.close()
    },
  }
}
