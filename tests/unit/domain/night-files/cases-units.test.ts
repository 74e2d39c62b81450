import { describe, expect, it } from 'vitest'
import { SourceProfileSchema } from '#app/domain/schemas/source-profile.ts'
import { type Case, check, file } from '#tests/fixtures/night-files/cases.ts'
import { NL_W } from '#tests/fixtures/night-files/profiles.ts'

const ISO = SourceProfileSchema.parse({
  time: { format: 'iso', zone: 'UTC' },
  basis: { kind: 'nitrogen-equivalent' },
})
const AT = '2026-11-08T06:00:00Z'
const LATER = '2026-11-08T06:10:00Z'
/** Pa in a Torr, by definition: 101325/760. */
const TORR = 133.32236842105263

/** A file of one wide column with the unit given in its header. */
function oneColumn(unit: string, cell = '1.0'): string {
  return file(`time,P1 (${unit})`, `${AT},${cell}`)
}

// 1 mbar = 1 hPa = 100 Pa, 1 bar = 1e5 Pa and 1 atm = 101325 Pa by definition; at, psi and inHg from their
// definitions in kilograms-force, pounds and millimetres of mercury (from memory, not verified).
const KNOWN_UNITS: [string, number][] = [
  ['mbar', 100],
  ['hPa', 100],
  ['Torr', TORR],
  ['torr', TORR],
  ['mmHg', TORR],
  ['mTorr', TORR / 1000],
  ['micron', TORR / 1000],
  ['µm', TORR / 1000],
  ['μm', TORR / 1000],
  ['µbar', 0.1],
  ['ubar', 0.1],
  ['Pa', 1],
  ['kPa', 1000],
  ['bar', 1e5],
  ['psia', 6894.757293168361],
  ['atm', 101325],
  ['at', 98066.5],
  ['inHg', 3386.388640341],
]

const CURVE = { channel: 'P1', voltsPerDecade: 0.75, voltsAtUnit: 7.75, unit: 'mbar', voltsChannel: 'P1 V' }
const VOLT_CHANNELS = [
  { name: 'P1', quantity: 'pressure' as const },
  { name: 'P1 V', quantity: 'voltage' as const },
  { name: 'P2', quantity: 'pressure' as const },
]

const CASES: Record<string, Case[]> = {
  '1 unit in the column header': [
    {
      name: 'is taken quietly where the profile agrees',
      file: oneColumn('mbar', '3.2E-08'),
      profile: { ...ISO, unit: 'mbar' },
      state: 'readable',
      readings: [['P1', AT, 3.2e-6, 'good']],
    },
    {
      name: 'is asked about where the profile says another',
      file: oneColumn('Torr', '3.2E-08'),
      profile: { ...ISO, unit: 'mbar' },
      state: 'needs-answers',
      readings: [],
      questions: ['unit'],
    },
  ],
  '2 unit in a line of metadata': [
    {
      name: 'holds for the rows under it, and another holds from its own line on',
      file: file('# Unit: Torr', 'time,P1', `${AT},1.0`, '# Unit: mbar', `${LATER},1.0`),
      profile: ISO,
      state: 'readable',
      readings: [
        ['P1', AT, TORR, 'good'],
        ['P1', LATER, 100, 'good'],
      ],
      remarks: ['unit-change'],
    },
    {
      name: 'is asked about where a later block departs from the profile',
      file: file('# Unit: mbar', 'time,P1', `${AT},1.0`, '# Unit: Torr', `${LATER},1.0`),
      profile: { ...ISO, unit: 'mbar' },
      state: 'needs-answers',
      questions: ['unit'],
    },
  ],
  '3 unit in a column of its own': [
    {
      name: 'is converted row by row, and its first change is flagged',
      file: file(
        'time,channel,value,unit',
        `${AT},P1,1.0,mbar`,
        `${LATER},P1,1.0,Torr`,
        '2026-11-08T06:20:00Z,P1,2.0,mbar',
      ),
      profile: ISO,
      state: 'readable',
      lines: { accepted: 2, flagged: 1 },
      readings: [
        ['P1', AT, 100, 'good'],
        ['P1', LATER, TORR, 'good'],
        ['P1', '2026-11-08T06:20:00Z', 200, 'good'],
      ],
      remarks: ['unit-change'],
    },
  ],
  '4 unit in each cell': [
    {
      name: 'is split from the number; one cell with an unknown unit is rejected alone',
      file: file('time,P1,P2', `${AT},3.2E-08 mbar,4.1E-08 mbar`, `${LATER},3.2E-08 furlong,4.1E-08 Torr`),
      profile: ISO,
      state: 'readable',
      rejected: ['3:unknown-unit'],
      readings: [
        ['P1', AT, 3.2e-6, 'good'],
        ['P2', AT, 4.1e-6, 'good'],
        ['P2', LATER, 4.1e-8 * TORR, 'good'],
      ],
    },
    {
      name: 'is asked about where a whole column has one that nobody knows',
      file: file(
        'time,P1,P2 (Pa)',
        `${AT},3.2 zorg,1`,
        `${LATER},3.2 zorg,1`,
        '2026-11-08T06:20:00Z,3.3 zorg,1',
        '2026-11-08T06:30:00Z,3.3 zorg,1',
      ),
      profile: ISO,
      state: 'readable',
      questions: ['unit-word:zorg'],
      lines: { flagged: 4 },
    },
    {
      name: 'is converted once somebody has said what it means',
      file: file('time,P1', `${AT},3.2 zorg`, `${LATER},3.2 zorg`, '2026-11-08T06:20:00Z,3.2 zorg'),
      profile: ISO,
      context: { answers: [{ id: 'unit-word:zorg', choice: 'mbar' }] },
      state: 'readable',
      readings: [
        ['P1', AT, 320, 'good'],
        ['P1', LATER, 320, 'good'],
        ['P1', '2026-11-08T06:20:00Z', 320, 'good'],
      ],
    },
  ],
  '5 no unit anywhere': [
    {
      name: 'stops, with the first values in Pa, mbar and Torr beside the last known ones',
      file: file('time,P1', `${AT},4.0E-08`, `${LATER},4.1E-08`),
      profile: ISO,
      context: { lastKnown: { P1: { value: 4.2e-6, atMs: Date.UTC(2026, 10, 7, 6) } } },
      state: 'needs-answers',
      readings: [],
      questions: ['unit'],
      more: (out) => {
        const [asked] = out.questions
        expect(asked?.choices.map(({ value }) => value)).toEqual(['Pa', 'mbar', 'Torr'])
        expect(asked?.choices[1]?.candidates[0]).toEqual({
          line: 2,
          text: '4.0E-08',
          meaning: '4.00 × 10⁻⁶ Pa; P1 was last 4.20 × 10⁻⁶ Pa',
        })
      },
    },
    {
      name: 'reads once a unit has been chosen',
      file: file('time,P1', `${AT},4.0E-08`),
      profile: ISO,
      context: { answers: [{ id: 'unit', choice: 'mbar' }] },
      state: 'readable',
      readings: [['P1', AT, 4e-6, 'good']],
    },
    {
      name: 'is refused where the files of the source always named theirs',
      file: file('Zeit;HC-01A', '08.11.2026 07:00:00;4,0E-08'),
      profile: NL_W,
      state: 'refused',
      refusal: { code: 'no-unit', line: 2, column: 2 },
    },
  ],
  '6 mbar and hPa side by side': [
    {
      name: 'are the same size',
      file: file('time,P1 (mbar),P2 (hPa)', `${AT},3.2E-08,3.2E-08`),
      profile: { ...ISO, unit: 'mbar' },
      state: 'readable',
      readings: [
        ['P1', AT, 3.2e-6, 'good'],
        ['P2', AT, 3.2e-6, 'good'],
      ],
    },
    {
      name: 'need no question where the profile says the other of the two',
      file: oneColumn('hPa'),
      profile: { ...ISO, unit: 'mbar' },
      state: 'readable',
      readings: [['P1', AT, 100, 'good']],
    },
  ],
  '7 and 8 units known and doubtful': [
    ...KNOWN_UNITS.map(
      ([unit, factor]): Case => ({
        name: `${unit} is converted`,
        file: oneColumn(unit),
        profile: ISO,
        state: 'readable',
        readings: [['P1', AT, factor, 'good']],
      }),
    ),
    ...(['MTorr', 'psig', 'inHg vac', 'barg', '?bar'] as const).map(
      (unit): Case => ({
        name: `${unit} stops the file with a question`,
        file: oneColumn(unit),
        profile: { ...ISO, unit: 'mbar', unitInFile: false },
        state: 'needs-answers',
        readings: [],
        questions: [`unit-word:${unit}`],
      }),
    ),
    {
      name: 'a doubtful unit in a line of metadata stops the file as well',
      file: file('# Unit: psig', 'time,P1', `${AT},1.0`),
      profile: { ...ISO, unit: 'mbar', unitInFile: false },
      state: 'needs-answers',
      questions: ['unit-word:psig'],
    },
    {
      name: 'a doubtful unit is read as the one that somebody chose',
      file: oneColumn('MTorr'),
      profile: ISO,
      context: { answers: [{ id: 'unit-word:MTorr', choice: 'mTorr' }] },
      state: 'readable',
      readings: [['P1', AT, TORR / 1000, 'good']],
    },
    {
      name: 'a column with a doubtful unit can be left out',
      file: file('time,P1 (psig),P2 (Pa)', `${AT},1.0,2.0`),
      profile: ISO,
      context: { answers: [{ id: 'unit-word:psig', choice: 'leave-out' }] },
      state: 'readable',
      readings: [['P2', AT, 2, 'good']],
    },
  ],
  '9 volts under a pressure channel': [
    {
      name: 'stop the column: no curve of the instrument is known',
      file: file('time,P1 (V),P2 (Pa)', `${AT},7.42,1.0`),
      profile: ISO,
      context: {
        channels: [
          { name: 'P1', quantity: 'pressure' },
          { name: 'P2', quantity: 'pressure' },
        ],
      },
      state: 'readable',
      questions: ['unfit-unit:P1'],
      readings: [['P2', AT, 1, 'good']],
    },
    {
      name: 'stop the file where nothing else is in it',
      file: file('time,P1 (V)', `${AT},7.42`),
      profile: ISO,
      context: { channels: [{ name: 'P1', quantity: 'pressure' }] },
      state: 'needs-answers',
      questions: ['unfit-unit:P1'],
      readings: [],
    },
  ],
  '9 volts with the curve of the gauge': [
    {
      name: 'become a pressure, and are kept as volts where the register has a channel for them',
      // 0.75 V a decade, 7.75 V at 1 mbar: 7 V is a decade below 1 mbar (10 Pa), 5.5 V three decades (0.1 Pa).
      file: file('time,P1 (V),P2 (Pa)', `${AT},7.0,1.0`, '2026-11-08T06:10:00Z,5.5,1.0'),
      profile: { ...ISO, curves: [CURVE] },
      context: { channels: VOLT_CHANNELS },
      state: 'readable',
      readings: [
        ['P1', AT, 10, 'good'],
        ['P1 V', AT, 7, 'good'],
        ['P2', AT, 1, 'good'],
        ['P1', '2026-11-08T06:10:00Z', 0.1, 'good'],
        ['P1 V', '2026-11-08T06:10:00Z', 5.5, 'good'],
        ['P2', '2026-11-08T06:10:00Z', 1, 'good'],
      ],
    },
    {
      name: 'are read by it also row by row, in millivolts too',
      file: file('time,channel,value,unit', `${AT},P1,7000,mV`, `${AT},P2,1.0,Pa`),
      profile: { ...ISO, curves: [{ ...CURVE, voltsChannel: null }] },
      context: { channels: VOLT_CHANNELS },
      state: 'readable',
      readings: [
        ['P1', AT, 10, 'good'],
        ['P2', AT, 1, 'good'],
      ],
    },
    {
      name: 'are turned away row by row without a curve, and never taken for pascals',
      file: file('time,channel,value,unit', `${AT},P1,7.0,V`, `${AT},P2,1.0,Pa`),
      profile: ISO,
      context: { channels: VOLT_CHANNELS },
      state: 'readable',
      questions: ['unfit-unit:P1'],
      rejected: ['2:unknown-unit'],
      readings: [['P2', AT, 1, 'good']],
    },
  ],
  '68 temperatures beside pressures': [
    {
      name: '°C, C, °F and K are converted, 850 °C is an open sensor',
      file: file('time,T1 (°C),T2 (C),T3 (°F),T4 (K),T5 (°C),P1 (Pa)', `${AT},20,20,212,300.15,850,1.0`),
      profile: ISO,
      state: 'readable',
      // 212 °F = 100 °C and 300.15 K = 27 °C by the definitions of the scales.
      readings: [
        ['T1', AT, 20, 'good'],
        ['T2', AT, 20, 'good'],
        ['T3', AT, 100, 'good'],
        ['T4', AT, 27, 'good'],
        ['T5', AT, 850, 'fault'],
        ['P1', AT, 1, 'good'],
      ],
      remarks: ['open-sensor'],
    },
  ],
  '69 gas factor applied already or not': [
    {
      name: 'is asked once about a source of pressures whose basis nobody has stated',
      file: oneColumn('Pa'),
      profile: { ...ISO, basis: null },
      state: 'readable',
      questions: ['basis'],
      readings: [['P1', AT, 1, 'good']],
    },
    {
      name: 'is asked no more once it has been answered, and the values stay as written',
      file: oneColumn('Pa'),
      profile: { ...ISO, basis: null },
      context: { answers: [{ id: 'basis', choice: 'corrected:H2' }] },
      state: 'readable',
      readings: [['P1', AT, 1, 'good']],
    },
    {
      name: 'is not asked about temperatures',
      file: oneColumn('°C'),
      profile: { ...ISO, basis: null },
      state: 'readable',
    },
  ],
}

for (const [title, cases] of Object.entries(CASES))
  describe(title, () => {
    it.each(cases)('$name', check)
  })
