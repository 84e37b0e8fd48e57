import type { Server as HttpServer } from 'node:http'
import { Server } from 'socket.io'
import type { Changed } from '../../config/schema/api.js'

/** Two batches a second at most for each client (interfaces.md §6). */
const least_ms = 500
/** A client whose socket holds more than this for several ticks reads no longer (architecture.md §5). */
const frozen_bytes = 256 * 1024
const frozen_ticks = 4

type Buffered = {
  readonly conn: { readonly transport: { readonly socket?: { readonly bufferedAmount?: number } } }
}

/**
 * The live feed: one emit per tick to every open page. It carries nothing that the API lacks.
 *
 * @param batch  asked once a tick: what is newer than the last batch, or null when nothing is
 * @param allow  whether a request of this host header may connect
 */
export const liveFeed = (
  server: HttpServer,
  batch: () => Changed | null,
  allow: (host: string | undefined, origin: string | undefined) => boolean,
): {
  /** Closes the server too: its feed, and every connection to it. */
  close(): Promise<void>
} => {
  const io = new Server(server, {
    path: '/live',
    transports: ['websocket'],
    perMessageDeflate: false,
    serveClient: false,
    pingInterval: 10_000,
    pingTimeout: 10_000,
    maxHttpBufferSize: 64 * 1024,
    allowRequest: (req, answer) => answer(null, allow(req.headers.host, req.headers.origin)),
  })
  const stuck = new WeakMap<object, number>()
  const timer = setInterval(() => {
    const changed = batch()
    if (changed === null) return
    io.emit('changed', changed)
    for (const socket of io.sockets.sockets.values()) {
      const waiting = (socket as unknown as Buffered).conn.transport.socket?.bufferedAmount ?? 0
      const ticks = waiting > frozen_bytes ? (stuck.get(socket) ?? 0) + 1 : 0
      stuck.set(socket, ticks)
      if (ticks >= frozen_ticks) socket.disconnect(true)
    }
  }, least_ms)
  return {
    async close() {
      clearInterval(timer)
      const closed = io.close()
      // It waits for every connection, and a browser keeps spare ones open that never ask anything.
      server.closeAllConnections()
      await closed
    },
  }
}
