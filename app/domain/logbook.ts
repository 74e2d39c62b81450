/** Kinds of log entry. Kinds that change what a curve means are drawn on the segment's chart unless the writer says no. */
export const ENTRY_KINDS = [
  'note',
  'valve',
  'pump',
  'gauge',
  'leak-check',
  'heat',
  'vent',
  'test',
  'round',
  'handover',
] as const
export type EntryKind = (typeof ENTRY_KINDS)[number]

export const ENTRY_KIND_FACTS: Record<EntryKind, { label: string; onChart: boolean }> = {
  note: { label: 'Note', onChart: false },
  valve: { label: 'Valve', onChart: true },
  pump: { label: 'Pump', onChart: true },
  gauge: { label: 'Gauge', onChart: true },
  'leak-check': { label: 'Leak check', onChart: true },
  heat: { label: 'Heat', onChart: true },
  vent: { label: 'Vent', onChart: true },
  test: { label: 'Test', onChart: true },
  round: { label: 'Round', onChart: false },
  handover: { label: 'Handover', onChart: false },
}
