import { QUANTITIES } from '../readings.ts'
import type { SourceProfile } from '../schemas/source-profile.ts'
import type { Block } from './block.ts'
import type { Dialect } from './dialect.ts'
import { NumberReader } from './numbers.ts'
import { choice, type QuestionList, question } from './questions.ts'
import { powerText } from './text.ts'
import type { Refusal } from './types.ts'
import { readUnit, toSi, type Unit, unitFits, unitOf } from './units.ts'

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
export function refuseWithoutUnit(block: Block, dialect: Dialect): Refusal | null {
  const valued =
    block.layout === 'wide' ? block.wide.filter(({ quantity }) => quantity !== QUANTITY_WITHOUT_UNIT) : []
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
          : (/^[<>]?=?\s*[+-]?[\d.,]+(?:[eEdD][+-]?\d+)?\s*(\D\S*)$/.exec(text)?.[1] ?? '')
      if (token !== '' && readUnit(token).kind === 'unit') return null
    }
  const row = dialect.rows[0]
  const at = block.layout === 'wide' ? (valued[0]?.at ?? 0) : block.valueAt
  const header = block.columns[at]?.inFile ?? ''
  const doubtful = dialect.columns[at]?.unit
  return {
    code: 'no-unit',
    line: row?.line ?? dialect.headerLine,
    column: at + 1,
    found:
      doubtful !== undefined && (doubtful.kind === 'gauge-pressure' || doubtful.kind === 'doubtful')
        ? `“${(row?.fields[at] ?? '').trim()}” under “${header}”: “${doubtful.token}” is no unit of absolute pressure`
        : `“${(row?.fields[at] ?? '').trim()}” under “${header}”, and no unit anywhere in the file`,
    expected:
      'a unit in the header such as “HC-01A (mbar)”, a line such as “# Einheit: mbar”, or a column with the unit',
    mend: 'Send the file as the logger wrote it. If its files never name a unit, an engineer sets it in the profile of the source.',
  }
}

/** Asks when the file names another unit than the profile of its source; returns the unit that counts, if settled. */
export function checkUnit(
  found: UnitFinding | null,
  dialect: Dialect,
  block: Block,
  profile: SourceProfile,
  questions: QuestionList,
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
  const numbers = new NumberReader({
    decimalMark: dialect.decimalMark,
    thousandsMark: null,
    bareExponent: false,
  })
  const samples = dialect.rows
    .map(({ fields, line }) => ({ line, text: (fields[at] ?? '').trim() }))
    .filter(({ text }) => Number.isFinite(numbers.read(text)))
    .slice(0, 3)
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
          choice(
            unit.token,
            unit.token,
            samples.map(({ line, text }) => ({
              line,
              text,
              meaning: `${powerText(toSi(numbers.read(text), unit))} ${QUANTITIES[unit.quantity].unit}`,
            })),
          ),
        ),
      }),
    dialect.rows.length,
  )
  return null
}
