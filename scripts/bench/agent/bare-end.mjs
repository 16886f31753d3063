/** Hears and sends, and does nothing else: see bare.ts. Says its port, and ends with its standard input. */
import { WebSocketServer } from 'ws'

const TICK_MS = 200
const FRAME = Buffer.alloc(125)
const server = new WebSocketServer({ host: '127.0.0.1', port: 0, perMessageDeflate: false })
server.on('connection', (socket) => socket.on('message', () => {}))
server.on('listening', () => process.stdout.write(`${server.address().port}\n`))
setInterval(() => {
  for (const client of server.clients) client.send(FRAME)
}, TICK_MS)
process.stdin.resume()
process.stdin.on('end', () => process.exit(0))
