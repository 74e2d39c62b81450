import type { Db } from '../../db/client.server.ts'
import { env } from '../../env.server.ts'
import { productNow } from '../../services/clock.server.ts'
import { sayUndelivered } from '../../services/mail-undelivered.server.ts'
import { repeat } from '../../services/repeat.server.ts'
import { makeSender } from './sender.server.ts'
import { openTransport } from './transport.ts'

/** Sends what comes into the outbox until the signal; what is on its way then is waited for. */
export async function sendMail(db: Db, owner: string, signal: AbortSignal): Promise<void> {
  const transport = openTransport(env().SMTP_URL)
  const undelivered = sayUndelivered(() => productNow(db))
  const sender = makeSender({ db, transport, owner, signal, undelivered })
  try {
    await repeat('send mail', signal, () => sender.step())
  } finally {
    transport.close()
  }
}
