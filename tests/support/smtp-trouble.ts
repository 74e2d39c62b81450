/** A mail server that can be told to misbehave, and remembers the messages to which it said yes. */
import type { AddressInfo, Socket } from 'node:net'
import { buffer } from 'node:stream/consumers'
import { SMTPServer } from 'smtp-server'

/**
 * `none`: takes everything. `refuse`: not now. `never`: this address never. `stall`: takes the message and says
 * nothing. `drop`: hangs up in the middle of the message. `drop-after`: keeps the message, and hangs up instead of yes.
 */
export type Trouble = 'none' | 'refuse' | 'never' | 'stall' | 'drop' | 'drop-after'

export interface TroubledServer {
  url: string
  port: number
  trouble: Trouble
  /** Message-ID and bytes, in the order in which they were kept, also those that came twice. */
  kept: { messageId: string; bytes: Buffer; envelopeFrom: string; to: string[] }[]
  /** How often a message was begun. */
  begun: number
  /** Called when a message is begun, and when one has been kept before the yes goes out. */
  onBegin: () => void
  onKept: () => void | Promise<void>
  stop(): Promise<void>
}

export async function startTroubledServer(port = 0): Promise<TroubledServer> {
  const sockets = new Set<Socket>()
  const server = new SMTPServer({
    authOptional: true,
    disabledCommands: ['STARTTLS'],
    logger: false,
    onRcptTo(address, _session, done) {
      if (self.trouble === 'never') done(refusal(550, `No mailbox ${address.address} here`))
      else if (self.trouble === 'refuse') done(refusal(451, 'Come back later'))
      else done()
    },
    onData(stream, session, done) {
      self.begun += 1
      self.onBegin()
      const { trouble } = self
      if (trouble === 'drop') {
        stream.once('data', hangUp)
        stream.resume()
        return
      }
      buffer(stream).then(async (bytes) => {
        if (trouble === 'stall') return
        const { mailFrom, rcptTo } = session.envelope
        self.kept.push({
          messageId: /^Message-ID:\s*(<[^>]+>)/im.exec(bytes.toString())?.[1] ?? '',
          bytes,
          envelopeFrom: mailFrom === false ? '' : mailFrom.address,
          to: rcptTo.map(({ address }) => address),
        })
        await self.onKept()
        if (trouble === 'drop-after') hangUp()
        else done()
      }, done)
    },
  })
  const hangUp = () => {
    for (const socket of sockets) socket.destroy()
  }
  server.on('error', () => {})
  server.server.on('connection', (socket: Socket) => {
    sockets.add(socket)
    socket.once('close', () => sockets.delete(socket))
  })
  await new Promise<void>((resolve, reject) => {
    server.server.once('error', reject)
    server.listen(port, '127.0.0.1', resolve)
  })
  const bound = (server.server.address() as AddressInfo).port
  const self: TroubledServer = {
    url: `smtp://127.0.0.1:${bound}`,
    port: bound,
    trouble: 'none',
    kept: [],
    begun: 0,
    onBegin: () => {},
    onKept: () => {},
    stop: async () => {
      hangUp()
      await new Promise<void>((resolve) => server.close(() => resolve()))
    },
  }
  return self
}

function refusal(responseCode: number, message: string): Error {
  return Object.assign(new Error(message), { responseCode })
}
