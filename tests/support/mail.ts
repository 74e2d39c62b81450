/** What the product has mailed, as the mail fake kept it. */
import type { KeptMessage } from '#app/mail/fake.ts'

/** All messages, newest first. */
export async function readMail(mailUrl: string): Promise<KeptMessage[]> {
  const response = await fetch(`${mailUrl}/messages`)
  if (!response.ok) throw new Error(`The mail fake answered ${response.status}.`)
  return (await response.json()) as KeptMessage[]
}

/** Waits for a message to that address whose subject matches; the newest of them. */
export async function waitForMail(
  mailUrl: string,
  wanted: { to: string; subject: RegExp },
  withinMs = 15_000,
): Promise<KeptMessage> {
  const giveUpAt = performance.now() + withinMs
  for (;;) {
    const messages = await readMail(mailUrl)
    const found = messages.find(({ to, subject }) => to.includes(wanted.to) && wanted.subject.test(subject))
    if (found !== undefined) return found
    if (performance.now() > giveUpAt) {
      const subjects = messages.map(({ to, subject }) => `${to.join(', ')}: ${subject}`).join('\n')
      throw new Error(
        `No mail to ${wanted.to} with ${wanted.subject} came. There are:\n${subjects || '(none)'}`,
      )
    }
    await new Promise((resolve) => setTimeout(resolve, 100))
  }
}
