/** What the sheets of a permit are printed from, as of a live permit on which everything is in order. */
import { modulesDrawing } from '#app/domain/paper/drawing.ts'
import type { PaperFacts } from '#app/domain/permit-sheets.ts'
import { fullContent } from './permit-content.ts'

export function paperFacts(changes: Partial<PaperFacts> = {}): PaperFacts {
  const at = new Date('2026-11-10T06:40:00.000Z')
  return {
    site: { name: 'Trial line', zone: 'Europe/Vienna', demo: false },
    number: 'HSP-2026-101',
    code: 'K7M4QR',
    address: 'https://ebbline.example/p/K7M4QR',
    qr: modulesDrawing([[true]], 70),
    printed: { at: new Date('2026-11-10T09:00:00.000Z'), by: 'Otto Berge' },
    state: 'issued',
    revision: 5,
    version: 1,
    approvedVersion: 1,
    content: fullContent({ contacts: [{ role: 'Desk', name: 'Ann', phone: '7-000' }] }),
    windowFrom: new Date('2026-11-10T06:00:00.000Z'),
    windowTo: new Date('2026-11-14T06:00:00.000Z'),
    currentUntil: new Date('2026-11-10T18:40:00.000Z'),
    people: {
      requestedBy: 'Rita Faber',
      approvedBy: 'Olga Lind',
      approvedAt: new Date('2026-11-09T09:00:00.000Z'),
      acceptedBy: 'Hans Orell',
      acceptedAt: at,
      holder: 'Hans Orell',
      deputies: ['Dora Pahl'],
      crew: ['Carl Ny'],
      isolating: 'Carl Ny',
      electrician: 'Ed Volt, licence E-1',
      attendant: null,
    },
    terms: 'Fan of bay 5 runs throughout',
    stopped: null,
    points: [
      {
        tag: 'IP-1',
        isolates: 'NV-T1 vent valve',
        required: 'shut',
        lock: { number: 'L-201', tagNumber: 'T-201', appliedBy: 'Carl Ny', appliedAt: at },
        verified: { by: 'Hans Orell', at },
      },
      { tag: 'IP-2', isolates: 'GV-T1 gate valve', required: 'shut', lock: null, verified: null },
    ],
    tests: [
      {
        kind: 'oxygen',
        place: 'bay 5',
        wanted: '19.5 to 23.5 %\nevery 12 h',
        last: {
          result: '20.8 %',
          passed: true,
          instrument: 'OXP-01',
          calibrationDue: new Date('2027-03-01T00:00:00.000Z'),
          by: 'Carl Ny',
          at,
          nextDueAt: new Date('2026-11-10T18:40:00.000Z'),
        },
        overdue: false,
      },
    ],
    hazards: [
      {
        key: 'hot-surface',
        label: 'Hot surfaces',
        applies: true,
        text: 'Flanges at 3 m are caged.',
        facts: [{ name: 'Leak', value: '5×10⁻⁸ Pa·m³/s, ≥ 3 Ω', how: '', source: '' }],
        findings: [],
        precautions: ['Probe before any touch.'],
        thresholds: [],
      },
      {
        key: 'x-ray',
        label: 'X-ray',
        applies: false,
        text: 'No glass here.',
        facts: [],
        findings: [],
        precautions: [],
        thresholds: [],
      },
    ],
    conflicts: [],
    heatingText: 'HX-1 gives 1000 A.',
    sketch: {
      fromM: 0,
      toM: 150,
      exclusionWestM: 10,
      exclusionEastM: 10,
      segments: [
        { tag: 'SG-T1', startM: 0, endM: 150 },
        { tag: 'SG-T2', startM: 150, endM: 300 },
      ],
      gates: [{ tag: 'GV-T1', atM: 150 }],
    },
    curve: {
      ambientC: 18,
      maxCelsius: 150,
      rampKH: 10,
      soakHours: 60,
      cooling: [
        { hours: 4, celsius: 90 },
        { hours: 9, celsius: 40 },
      ],
      nowH: 2,
      startText: '2026-11-10 08:00 (UTC+01:00)',
      stepText: 'Ramp: hour 2.',
    },
    ...changes,
  }
}
