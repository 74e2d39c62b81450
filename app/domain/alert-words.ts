/** Words of alerts that tables, rules, mail and pages share. */

/** What an alert rule watches, in the order of the conditions' numbers A1 to A22. */
export const ALERT_CONDITIONS = [
  'pressure-above-limit',
  'pressure-above-target',
  'fast-rise',
  'slow-rise',
  'pressure-while-heating',
  'no-data',
  'file-missing',
  'over-temperature',
  'ramp-too-fast',
  'spread',
  'thermocouple-suspect',
  'ion-current',
  'pump-fault',
  'gauges-disagree',
  'off-prediction',
  'gauge-health',
  'supply-fault',
  'power-above-cap',
  'permit',
  'excluded-entry',
  'oxygen',
  'mail-undelivered',
] as const
export type AlertCondition = (typeof ALERT_CONDITIONS)[number]

export const ALERT_PRIORITIES = ['highest', 'high', 'medium', 'low'] as const
export type AlertPriority = (typeof ALERT_PRIORITIES)[number]

export const ALERT_PRIORITY_LABELS: Record<AlertPriority, string> = {
  highest: 'Highest',
  high: 'High',
  medium: 'Medium',
  low: 'Low',
}

/**
 * Where an alert stands. Active and nobody's; active and owned; gone by itself and not yet seen; ended; unmade by
 * corrected data. Shelved, suppressed and out of service are said beside it, with their own dates.
 */
export const ALERT_STATES = ['active', 'owned', 'cleared-unseen', 'ended', 'withdrawn'] as const

export const ALERT_ACTS = [
  'raise',
  'own',
  'offer',
  'take-over',
  'decline',
  'note',
  'shelve',
  'unshelve',
  'clear',
  'reset',
  'withdraw',
  'escalate',
  'worsen',
] as const

export const SHELF_REASONS = ['known-work', 'false-signal', 'waiting-for-part', 'duplicate', 'other'] as const

/** Who is called, in the order of the ladder. */
export const LADDER_STEPS = [
  'on-call-1',
  'on-call-2',
  'manager',
  'officer',
  'deputy-officer',
  'engineer',
  'administrator',
] as const

export const MAIL_KINDS = ['alert', 'escalation', 'clear', 'digest', 'summary', 'notice', 'test'] as const
export type MailKind = (typeof MAIL_KINDS)[number]

/** Waiting for its time; taken by a worker; the mail server has said yes; given up; kept back for a summary or the digest. */
export const MAIL_STATES = ['waiting', 'sending', 'sent', 'failed', 'folded'] as const
