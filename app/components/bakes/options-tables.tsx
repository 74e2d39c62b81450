/** Bake options in figures: what each asks, what each leaves behind, and what was left out. */
import { Link } from 'react-router'
import {
  type BakeOptionRow,
  energyText,
  hoursText,
  type LeftOut,
  type OptionOutcome,
} from '#app/domain/bake-options.ts'
import type { Band } from '#app/domain/bake-options-bands.ts'
import { type Demand, figure } from '#app/domain/bake-options-demands.ts'
import { useSite } from '#app/hooks/use-site.ts'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { Pressure } from '../ui/pressure.tsx'

const GAS_WORDS = { water: 'water', hydrogen: 'hydrogen', air: 'air leak' } as const

/** What each option asks of time, power and hardware. */
export function OptionsTable({
  rows,
  planLink,
}: {
  rows: readonly BakeOptionRow[]
  /** Address of a new plan with an option filled in; null for readers who make no plans. */
  planLink: ((row: BakeOptionRow) => string) | null
}) {
  const columns: Column<BakeOptionRow>[] = [
    { key: 'celsius', head: 'Bake', rowHead: true, cell: ({ celsius }) => `${celsius} °C` },
    { key: 'soak', head: 'Soak', align: 'right', cell: ({ soakHours }) => soakText(soakHours) },
    {
      key: 'total',
      head: 'Ramp, soak, cooling',
      align: 'right',
      cell: (row) => (
        <>
          {hoursText(row.totalHours)}
          <span className="block text-sm text-ink-3">
            {row.rampHours.toFixed(1)} + {row.soakHours.toFixed(0)} + {row.coolHours.toFixed(1)} h
          </span>
        </>
      ),
    },
    { key: 'energy', head: 'Energy', align: 'right', cell: ({ energyKWh }) => energyText(energyKWh) },
    {
      key: 'power',
      head: 'Power, soak / ramp end',
      align: 'right',
      cell: ({ soakKW, peakKW }) => `${soakKW.toFixed(1)} / ${peakKW.toFixed(1)} kW`,
    },
    {
      key: 'supply',
      head: 'Ramp end on the set',
      align: 'right',
      cell: ({ supply }) => (
        <>
          {figure(supply.amps, 'A')}, {figure(supply.volts, 'V')}
          <span className="block text-sm text-ink-3">{supply.tag}</span>
        </>
      ),
    },
    {
      key: 'stroke',
      head: 'Each joint, of rated',
      align: 'right',
      cell: ({ strokes }) =>
        strokes.map(({ tag, mm, ratedMm, bellowsCount }) => (
          <span key={tag} className="block">
            {figure(mm, 'mm')} of {figure(ratedMm, 'mm')}
            <span className="sr-only">
              , {bellowsCount} joints of {tag}
            </span>
          </span>
        )),
    },
    {
      key: 'binds',
      head: 'Nearest limit of the hardware',
      cell: ({ tightest }) => <Tightest {...tightest} />,
    },
  ]
  if (planLink !== null) {
    columns.push({
      key: 'choose',
      head: 'Plan',
      nowrap: true,
      cell: (row) => (
        <Link to={planLink(row)} className="link">
          Choose <span className="sr-only">{row.celsius} °C</span>
        </Link>
      ),
    })
  }
  return (
    <DataTable
      caption="Bakes that meet the target: time, energy, power, current, joints and the nearest limit"
      columns={columns}
      rows={rows}
      rowKey={({ celsius }) => celsius}
      empty="No bake meets the target within the limits."
    />
  )
}

function soakText(hours: number): string {
  return hours === 0 ? 'the ramp alone' : hoursText(hours)
}

function Tightest({ what, uses, limit, unit, share }: Demand) {
  return (
    <span className="block min-w-48">
      {what}
      <span className="block text-sm text-ink-3">
        {figure(uses, unit)} of {figure(limit, unit)}, {Math.round(share * 100)} % used
      </span>
    </span>
  )
}

interface After {
  row: BakeOptionRow
  outcome: OptionOutcome
}

/** What each option leaves behind at the gauge that reads highest. */
export function AfterTable({ rows }: { rows: readonly BakeOptionRow[] }) {
  const { unit } = useSite()
  const columns: Column<After>[] = [
    { key: 'celsius', head: 'Bake', rowHead: true, cell: ({ row }) => `${row.celsius} °C` },
    { key: 'gauge', head: 'At', nowrap: true, cell: ({ outcome }) => outcome.gauge },
    {
      key: 'n2',
      head: `Reading, ${unit} N₂`,
      align: 'right',
      cell: ({ outcome }) => <Valued pa={outcome.n2EquivalentPa} band={outcome.bands.n2} />,
    },
    {
      key: 'water',
      head: `Water, ${unit}`,
      align: 'right',
      cell: ({ outcome }) => (
        <Valued pa={outcome.waterPa} band={outcome.bands.water} floor={outcome.waterAtFloor} />
      ),
    },
    {
      key: 'hydrogen',
      head: `Hydrogen, ${unit}`,
      align: 'right',
      cell: ({ outcome }) => <Valued pa={outcome.hydrogenPa} band={outcome.bands.hydrogen} />,
    },
    {
      key: 'decides',
      head: 'What decides the soak',
      cell: ({ row }) => (row.soakHours === 0 ? 'nothing: the ramp is enough' : GAS_WORDS[row.decides]),
    },
    {
      key: 'sure',
      head: 'Soak that brings the whole band to the target',
      align: 'right',
      cell: ({ row }) => (row.sureSoakHours === null ? 'more than a year' : soakText(row.sureSoakHours)),
    },
    {
      key: 'solves',
      head: 'Full solutions',
      align: 'right',
      cell: ({ row }) => row.solves,
    },
  ]
  return (
    <DataTable
      caption="What each bake leaves behind, a day after the tube is cold, with bands"
      columns={columns}
      rows={rows.flatMap((row) => row.outcomes.map((outcome) => ({ row, outcome })))}
      rowKey={({ row, outcome }) => `${row.celsius} ${outcome.tag}`}
      empty="Nothing to show without an option."
    />
  )
}

function Valued({ pa, band, floor = false }: { pa: number; band: Band; floor?: boolean }) {
  return (
    <>
      {floor && 'at or below '}
      <Pressure pa={pa} bare />
      <span className="block text-sm text-ink-3">
        <Pressure pa={band.lowPa} bare /> to <Pressure pa={band.highPa} bare />
      </span>
    </>
  )
}

const REASON_WORDS: Record<LeftOut['reason'], string> = {
  part: 'a part',
  stroke: 'the bellows',
  current: 'current',
  voltage: 'voltage',
  power: 'the power cap',
  feeder: 'a feeder',
  target: 'the target',
  unconfirmed: 'not confirmed',
  beaten: 'beaten by another',
}

/** Temperatures that are no option, neighbours with one reason together. */
export function LeftTable({ left }: { left: readonly LeftOut[] }) {
  return (
    <DataTable
      caption="Temperatures left out, and why"
      columns={[
        {
          key: 'celsius',
          head: 'Temperatures',
          rowHead: true,
          cell: ({ from, to }) => (from === to ? `${from} °C` : `${from} to ${to} °C`),
        },
        { key: 'reason', head: 'What binds', nowrap: true, cell: ({ reason }) => REASON_WORDS[reason] },
        { key: 'words', head: 'In words', cell: ({ words }) => words },
      ]}
      rows={grouped(left)}
      rowKey={({ from }) => from}
      empty="Every temperature is an option."
    />
  )
}

function grouped(left: readonly LeftOut[]): (LeftOut & { from: number; to: number })[] {
  const groups: (LeftOut & { from: number; to: number })[] = []
  for (const one of left) {
    const last = groups.at(-1)
    if (last !== undefined && last.reason === one.reason) last.to = one.celsius
    else groups.push({ ...one, from: one.celsius, to: one.celsius })
  }
  return groups
}
