/** The curves of a plan in figures, thinned to what can be read. */
import type { PlanPrediction } from '#app/domain/bake-plan-prediction.ts'
import { useSite } from '#app/hooks/use-site.ts'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { Pressure } from '../ui/pressure.tsx'

/** Every so many points one line. */
const EVERY = 8

export function PlanTable({ prediction }: { prediction: PlanPrediction }) {
  const { unit } = useSite()
  const { hours, setpointC, wallC, powerKW, segments } = prediction
  const last = hours.length - 1
  const rows = hours.map((_, i) => i).filter((i) => i % EVERY === 0 || i === last)
  const columns: Column<number>[] = [
    { key: 'hour', head: 'Hour', rowHead: true, cell: (i) => (hours[i] ?? 0).toFixed(1) },
    {
      key: 'set',
      head: 'Setpoint, °C',
      align: 'right',
      cell: (i) => setpointC[i]?.toFixed(0) ?? 'off',
    },
    { key: 'wall', head: 'Wall, °C', align: 'right', cell: (i) => wallC[i]?.toFixed(0) ?? '' },
    { key: 'power', head: 'Power, kW', align: 'right', cell: (i) => powerKW[i]?.toFixed(1) ?? '' },
    ...segments.flatMap(({ tag, n2Pa, byGasPa, strokeMm }): Column<number>[] => [
      {
        key: `${tag}-n2`,
        head: `${tag}, ${unit}`,
        align: 'right',
        cell: (i) => <Pressure pa={n2Pa[i] ?? null} bare reason="no model" />,
      },
      {
        key: `${tag}-water`,
        head: `${tag} water, ${unit}`,
        align: 'right',
        cell: (i) => <Pressure pa={byGasPa.H2O[i] ?? null} bare reason="no model" />,
      },
      {
        key: `${tag}-hydrogen`,
        head: `${tag} hydrogen, ${unit}`,
        align: 'right',
        cell: (i) => <Pressure pa={byGasPa.H2[i] ?? null} bare reason="no model" />,
      },
      {
        key: `${tag}-stroke`,
        head: `${tag} stroke, mm`,
        align: 'right',
        cell: (i) => strokeMm[i]?.toFixed(1) ?? '',
      },
    ]),
  ]
  return (
    <details className="mt-3">
      <summary className="link inline-block cursor-pointer py-1">The curves in figures</summary>
      <DataTable
        caption="Expected course, hours from the start of heating"
        columns={columns}
        rows={rows}
        rowKey={(i) => i}
        empty="No curve."
      />
    </details>
  )
}
