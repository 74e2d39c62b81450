import type { Quantity } from '../readings.ts'
import type { SourceProfile } from '../schemas/source-profile.ts'
import type { Block } from './block.ts'
import type { Dialect } from './dialect.ts'
import { looksNumeric, NumberReader } from './numbers.ts'
import { choice, type QuestionList, question } from './questions.ts'
import type { ReadContext, Refusal } from './types.ts'
import { unitCandidates, unitSamples } from './unit-words.ts'
import { type Unit, unitFits, unitOf, unitsOf } from './units.ts'

export interface UnitFinding {
  unit: Unit | null
  line: number
  column: number
}

const QUANTITY_WITHOUT_UNIT = 'switch'

/**
 * Whether any reading of the file can have a unit. The first rows are looked at, since a long file names it row by
 * row and some files write it into every cell.
 */
export function refuseWithoutUnit(
  block: Block,
  dialect: Dialect,
  facts: { profile: SourceProfile; questions: QuestionList; context: ReadContext },
): Refusal | null {
  const missing = missingUnit(block, dialect)
  if (missing === null || facts.profile.unit !== null) return missing?.refusal ?? null
  const { at, refusal, quantity } = missing
  const numbers = plainNumbers(dialect)
  const channel = block.columns[at]?.channel ?? ''
  const named = (fields: readonly string[]) =>
    block.layout === 'long' ? (fields[block.channelAt] ?? '').trim() : channel
  const samples = unitSamples(dialect.rows, at, named, numbers)
  facts.questions.ask(
    'unit',
    () =>
      question({
        ...refusal,
        code: 'unit',
        id: 'unit',
        kind: 'unit',
        text: 'No unit stands anywhere in this file. In which unit are its values?',
        mend: 'Compare the values with what the gauges showed last and choose; if in doubt, ask whoever set the logger up.',
        choices: (COMMON_UNITS[quantity] ?? unitsOf(quantity)).map((unit) =>
          choice(unit.token, unit.token, unitCandidates(samples, unit, facts.context)),
        ),
      }),
    dialect.rows.length,
  )
  return null
}

/** Units to choose from where a file names none, the commonest of each quantity (common practice, no source). */
const COMMON_UNITS: Partial<Record<Quantity, Unit[]>> = {
  pressure: ['Pa', 'mbar', 'Torr'].map(unitOf).filter((unit) => unit !== null),
}

function plainNumbers(dialect: Dialect): NumberReader {
  return new NumberReader({ decimalMark: dialect.decimalMark, thousandsMark: null, bareExponent: false })
}

function missingUnit(
  block: Block,
  dialect: Dialect,
): { at: number; quantity: Quantity; refusal: Refusal } | null {
  const awaited = (at: number) => !['unit', 'none'].includes(dialect.columns[at]?.unit.kind ?? 'none')
  const valued = block.wide.filter(({ quantity, at }) => quantity !== QUANTITY_WITHOUT_UNIT && !awaited(at))
  if (block.layout === 'wide' && (valued.length === 0 || valued.some(({ unit }) => unit !== null)))
    return null
  if (block.layout === 'long' && block.unit !== null) return null
  const cells = block.layout === 'wide' ? valued.map(({ at }) => at) : [block.unitAt, block.valueAt]
  for (const { fields } of dialect.rows)
    for (const at of cells) {
      const text = (fields[at] ?? '').trim()
      const token =
        at === block.unitAt
          ? text
          : looksNumeric(text)
            ? ''
            : (/^[<>]?=?\s*[+-]?[\d.,]+(?:[eEdD][+-]?\d+)?\s*(\D\S*)$/.exec(text)?.[1] ?? '')
      // A unit that nobody knows is another question than none.
      if (token !== '') return null
    }
  const row = dialect.rows[0]
  const at = block.layout === 'wide' ? (valued[0]?.at ?? 0) : block.valueAt
  const header = block.columns[at]?.inFile ?? ''
  const refusal: Refusal = {
    code: 'no-unit',
    line: row?.line ?? dialect.headerLine,
    column: at + 1,
    found: `“${(row?.fields[at] ?? '').trim()}” under “${header}”, and no unit anywhere in the file`,
    expected:
      'a unit in the header such as “HC-01A (mbar)”, a line such as “# Einheit: mbar”, or a column with the unit',
    mend: 'Send the file as the logger wrote it. If its files never name a unit, an engineer sets it in the profile of the source.',
  }
  return { at, quantity: block.layout === 'wide' ? (valued[0]?.quantity ?? 'pressure') : 'pressure', refusal }
}

/** Asks when the file names another unit than the profile of its source; returns the unit that counts, if settled. */
export function checkUnit(
  found: UnitFinding | null,
  dialect: Dialect,
  block: Block,
  profile: SourceProfile,
  questions: QuestionList,
  context: ReadContext,
): Unit | null {
  const wanted = unitOf(profile.unit)
  if (found === null || found.unit === null || wanted === null) return null
  if (wanted.quantity !== found.unit.quantity) return null
  if (wanted.factor === found.unit.factor && wanted.offset === found.unit.offset) return null
  const answer = unitOf(questions.answer('unit'))
  if (answer !== null) return answer
  const given = found.unit
  const at =
    block.layout === 'wide'
      ? (block.wide.find(({ quantity }) => unitFits(quantity, given))?.at ?? 0)
      : block.valueAt
  const channel = block.columns[at]?.channel ?? ''
  const named = (fields: readonly string[]) =>
    block.layout === 'long' ? (fields[block.channelAt] ?? '').trim() : channel
  const samples = unitSamples(dialect.rows, at, named, plainNumbers(dialect))
  questions.ask(
    'unit',
    () =>
      question({
        id: 'unit',
        kind: 'unit',
        line: found.line,
        column: found.column,
        text: `This file says ${given.token}, the profile of its source says ${wanted.token}. In which unit are the values?`,
        found: `the unit “${given.token}”`,
        expected: `“${wanted.token}”, as in the files before`,
        mend: 'Compare the values with what the gauges showed last and choose; if in doubt, ask whoever changed the logger.',
        choices: [given, wanted].map((unit) =>
          choice(unit.token, unit.token, unitCandidates(samples, unit, context)),
        ),
      }),
    dialect.rows.length,
  )
  return null
}
