// The intake alone, in a process of its own that tests may kill: embedded broker or outside
// client, decode, log. Its one argument is JSON: { data, probes, outsidePort?, ackFirst? }.
// `ackFirst` is the mistake that the kill tests are there to find: it answers before the commit.
import { decode } from '../../dist/server/decode/decode.js'
import { mappingsOf } from '../../dist/server/decode/mappings.js'
import { openLog } from '../../dist/server/log/sqliteLog.js'
import { openBroker } from '../../dist/server/mqtt/broker.js'
import { listenTo } from '../../dist/server/mqtt/outside.js'
import { siteOf } from './site.mjs'

const { data, probes, outsidePort, ackFirst } = JSON.parse(process.argv[2])
const mappings = mappingsOf(siteOf(probes))
const log = await openLog({ data, onOutage: () => {} })

const receive = async (message) => {
  const { readings, refused } = decode({ ...message, receivedAt_ms: Date.now() }, mappings)
  const kept = log.append(
    readings.map((reading) => ({ part: 0, reading })),
    refused,
  )
  if (ackFirst !== true) await kept
}

const way =
  outsidePort === undefined
    ? await openBroker({ host: '127.0.0.1', port: 0, receive })
    : listenTo({
        name: 'plant',
        host: '127.0.0.1',
        port: outsidePort,
        user: null,
        password: null,
        clientId: 'hoarline-test',
        filters: mappings.filters('plant'),
        subscribed: JSON.parse(log.reader.meta('subscribed') ?? '[]'),
        onSubscribed: (filters) => log.apply({ meta: { subscribed: JSON.stringify(filters) } }),
        receive,
        onStatus: (status) => console.log(JSON.stringify(status)),
        firstRetry_ms: 20,
      })

console.log(JSON.stringify({ ready: true, port: 'port' in way ? way.port : null }))

process.on('SIGTERM', async () => {
  await way.close()
  await log.close()
  process.exit(0)
})
