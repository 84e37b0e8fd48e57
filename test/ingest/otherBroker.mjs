// Somebody else's broker, in a process of its own that tests may kill. It keeps its sessions in
// memory. Its one argument is the port; it tells its parent of each PUBACK that comes in.
import { createServer } from 'node:net'
import { Aedes } from 'aedes'

const aedes = await Aedes.createBroker({ concurrency: 1000 })
aedes.on('ack', (packet, client) => {
  if (packet && client) process.send?.({ acked: client.id })
})
aedes.on('subscribe', (subscriptions, client) => {
  process.send?.({ subscribed: client.id, topics: subscriptions.map((s) => s.topic) })
})
const server = createServer(aedes.handle)
server.listen({ host: '127.0.0.1', port: Number(process.argv[2]) }, () => {
  process.send?.({ port: server.address().port })
})
