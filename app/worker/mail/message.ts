/** A row of the outbox as the message that goes out: the same row gives the same message, however often it is sent. */
import type { SendMailOptions } from 'nodemailer'
import { escapeHtml, headerSafe, mailDate } from '../../domain/mail/text.ts'
import type { ClaimedMails } from '../../services/mail-sending.server.ts'
import { bounceAddress, type MailSettings } from '../../services/mail-settings.server.ts'

type MailRow = ClaimedMails['mails'][number]

/** What the mail library needs to write the message and hand it over. */
export function toMessage(
  mail: MailRow,
  { site, settings }: Pick<ClaimedMails, 'site' | 'settings'>,
): SendMailOptions {
  return {
    from: settings.from,
    replyTo: settings.replyTo,
    to: { name: '', address: mail.address },
    subject: headerSafe(mail.subject),
    messageId: mail.messageId,
    ...(mail.threadId === '' ? {} : { inReplyTo: mail.threadId, references: mail.threadId }),
    headers: {
      Date: mailDate(mail.createdAt, site.timeZone),
      // So that no absence notice answers it, RFC 3834 section 5.
      'Auto-Submitted': 'auto-generated',
      'List-Id': listId(settings),
      ...furtherHeaders(mail),
    },
    text: `${mail.text}\n`,
    html: asPage(mail.subject, mail.html),
    // Lines stay as they were broken, and every mail server takes them.
    textEncoding: 'quoted-printable',
    // Of its own for each mail, so that what comes back names the mail, also where the other side quotes nothing.
    envelope: { from: bounceAddress(mail.messageId, settings.domain), to: [mail.address] },
    disableFileAccess: true,
    disableUrlAccess: true,
  }
}

function listId(settings: MailSettings): string {
  return `Vacuum alerts <alerts.${settings.domain}>`
}

/** What is folded into one mail may be more urgent than its first: duty mail is not unsubscribed from by a click. */
function furtherHeaders({ headers, kind, priority }: MailRow): Record<string, string> {
  if (kind === 'digest' || priority === 'low') return headers
  return Object.fromEntries(Object.entries(headers).filter(([name]) => !/^list-unsubscribe/i.test(name)))
}

/** No picture, no colour that means something, nothing loaded from anywhere. */
function asPage(title: string, body: string): string {
  return `<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta name="viewport" content="width=device-width">
<meta name="color-scheme" content="light dark">
<title>${escapeHtml(headerSafe(title))}</title>
</head>
<body style="max-width: 40em; margin: 1em; font: 16px/1.5 sans-serif; overflow-wrap: anywhere">
${body}
</body>
</html>
`
}
