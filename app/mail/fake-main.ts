/** The mail fake as a process: `tsx app/mail/fake-main.ts <folder for messages>`. */
import { endWithin, reportReady, untilStopped } from '../cli/until-stopped.ts'
import { startMailFake } from './fake.ts'

try {
  const told = untilStopped()
  const [folder] = process.argv.slice(2)
  const fake = await startMailFake(folder === undefined ? {} : { folder })
  reportReady({ smtpUrl: fake.smtpUrl, httpUrl: fake.httpUrl })
  await told
  endWithin(3_000)
  await fake.stop()
  process.exit(0)
} catch (error) {
  process.stderr.write(`Mail fake: ${error instanceof Error ? error.message : String(error)}\n`)
  process.exit(1)
}
