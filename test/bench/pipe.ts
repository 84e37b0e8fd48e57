import { createServer } from 'node:http'
import { Server } from 'socket.io'
import { openLog } from '../../server/log/sqliteLog.js'
import { openBroker } from '../../server/mqtt/broker.js'

/**
 * The plain pipe: the same broker, JSON parse, the same SQLite settings, and an emit twice a
 * second. No mapping, no physics, no verdict. What the program costs is measured against it.
 */
const [data = ''] = process.argv.slice(2)
const log = await openLog({ data, onOutage: () => {} })
const http = createServer()
const io = new Server(http, { path: '/live', transports: ['websocket'] })
const latest = new Map<string, number>()
const broker = await openBroker({
  host: '127.0.0.1',
  port: 0,
  receive: async ({ topic, payload }) => {
    const [record] = JSON.parse(Buffer.from(payload).toString()) as {
      n: string
      v: number
    }[]
    if (record === undefined) return
    const reading = {
      probe: topic as never, // the pipe knows no probes; the topic stands for one
      t_ms: Date.now(),
      receivedAt_ms: Date.now(),
      celsius: record.v,
      seq: -1,
      quality: 'good' as const,
      timeSource: 'receipt' as const,
    }
    await log.append([{ part: 0, reading }], [])
    latest.set(topic, record.v)
  },
})
setInterval(() => {
  io.emit('changed', [...latest])
  latest.clear()
}, 500)
await new Promise<void>((resolve) => http.listen(0, '127.0.0.1', resolve))
console.log(JSON.stringify({ mqtt: broker.port }))
process.on('SIGTERM', () => process.exit(0))
