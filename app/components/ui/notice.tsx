const TONES = {
  plain: 'border-vac bg-vac-soft',
  warn: 'border-warn bg-warn-soft',
  bad: 'border-bad bg-bad-soft',
  heat: 'border-heat bg-heat-soft',
}

type NoticeTone = keyof typeof TONES

const TONE_WORDS: Record<NoticeTone, string> = {
  plain: '',
  warn: 'Look here: ',
  bad: 'Not done: ',
  heat: 'Hot: ',
}

/**
 * A few sentences that must not be missed. The tone has a word of its own for readers who see no colour.
 *
 * @param announce reads it out when it appears: `status` waits for a pause, `alert` does not
 * @param lead replaces the tone's word; it is set in bold
 */
export function Notice({
  tone = 'plain',
  announce,
  lead = TONE_WORDS[tone],
  children,
}: {
  tone?: NoticeTone
  announce?: 'status' | 'alert'
  lead?: string
  children: React.ReactNode
}) {
  return (
    <div role={announce} className={`mb-4 border-l-4 px-3 py-2 text-ink ${TONES[tone]}`}>
      {lead !== '' && <strong className="font-semibold">{lead}</strong>}
      {children}
    </div>
  )
}
