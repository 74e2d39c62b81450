/** A worker of its own that sends mail until it is killed: for tests that kill it. SMTP_URL says where to. */
import { getDb } from '#app/db/client.server.ts'
import { env } from '#app/env.server.ts'
import { makeSender } from '#app/worker/mail/sender.server.ts'
import { openTransport } from '#app/worker/mail/transport.ts'

const sender = makeSender({
  db: getDb(),
  transport: openTransport(env().SMTP_URL, { silentMs: 1_000 }),
  owner: `process ${process.pid}`,
  signal: new AbortController().signal,
  undelivered: async () => {},
})
process.stdout.write('begun\n')
for (;;) {
  if ((await sender.step()) > 0) await new Promise((resolve) => setTimeout(resolve, 20))
}
