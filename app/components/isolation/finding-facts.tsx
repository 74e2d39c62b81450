/** The result of an isolation test in figures, each with its doubt and its basis. */
import { Facts } from '#app/components/ui/panel.tsx'
import { Pressure } from '#app/components/ui/pressure.tsx'
import {
  againstLimit,
  type IsolationFinding,
  type LimitAnswer,
  SHAPE_WORDS,
} from '#app/domain/isolation-tests.ts'

const ANSWERS: Record<LimitAnswer, { text: string; tone: string }> = {
  within: { text: 'within the limit', tone: 'text-ink-2' },
  over: { text: 'over the limit', tone: 'text-bad' },
  'cannot-tell': { text: 'cannot be told from the limit', tone: 'text-warn' },
}

export function FindingFacts({
  finding,
  limitPaPerHour,
}: {
  finding: IsolationFinding
  limitPaPerHour: number | null
}) {
  const answer = limitPaPerHour === null ? null : ANSWERS[againstLimit(finding, limitPaPerHour)]
  const { bend, temperatureC } = finding
  return (
    <>
      <Facts
        items={[
          {
            name: 'Rise, as the gauge reads',
            value: (
              <>
                <PlusMinus value={finding.ratePaPerHour} se={finding.rateSePaPerHour} unit="Pa/h" />
                {answer !== null && <span className={`block text-sm ${answer.tone}`}>{answer.text}</span>}
              </>
            ),
          },
          {
            name: 'Limit',
            value: limitPaPerHour === null ? 'none set' : <Scientific value={limitPaPerHour} unit="Pa/h" />,
          },
          {
            name: 'Gas load, nitrogen-equivalent',
            value: (
              <PlusMinus value={finding.throughputPaM3S} se={finding.throughputSePaM3S} unit="Pa·m³/s" />
            ),
          },
          {
            name: 'The same if it is hydrogen',
            value: <Scientific value={finding.hydrogenPaM3S} unit="Pa·m³/s" />,
          },
          ...(bend === null
            ? []
            : [
                {
                  name: 'Bend',
                  value: (
                    <>
                      <Pressure pa={bend.risePa} /> within {bend.tauHours.toFixed(1)} h
                    </>
                  ),
                },
              ]),
          {
            name: 'From, to',
            value: (
              <>
                <Pressure pa={finding.firstPa} /> to <Pressure pa={finding.lastPa} />
              </>
            ),
          },
          {
            name: 'Tube temperature',
            value:
              temperatureC === null
                ? 'no readings'
                : `${temperatureC.low.toFixed(1)} to ${temperatureC.high.toFixed(1)} °C`,
          },
        ]}
      />
      <p className="mt-2">{SHAPE_WORDS[finding.kind]}.</p>
      <p className="mt-2 text-sm text-ink-3">
        Fit of p = p₀ + r·t + a·(1 − exp(−t/τ)) to {finding.points} means of {finding.binSeconds} s of{' '}
        {finding.gauge}, weighted by the reading; the bend is kept only where the readings call for it. ± is
        two standard errors, their correlation in time counted. Gas load is the rise times{' '}
        {finding.volumeM3.toFixed(1)} m³, the tube's volume by the register, taken as exact; for hydrogen the
        reading is divided by 0.43, the usual factor of ion gauges. Not corrected for temperature: one degree
        changes the pressure by 0.3 %, the outgassing by about 7 %.
      </p>
    </>
  )
}

function Scientific({ value, unit }: { value: number; unit: string }) {
  const [digits = '0', exponent = '0'] = value.toExponential(1).split('e')
  return (
    <span className="whitespace-nowrap">
      {digits.replace('-', '−')} × 10<sup>{String(Number(exponent)).replace('-', '−')}</sup>&nbsp;{unit}
    </span>
  )
}

function PlusMinus({ value, se, unit }: { value: number; se: number; unit: string }) {
  const exponent = Math.floor(Math.log10(Math.max(Math.abs(value), 1e-30)))
  const part = (number: number) => (number / 10 ** exponent).toFixed(2)
  return (
    <span className="whitespace-nowrap">
      ({part(value)} ± {part(2 * se)}) × 10<sup>{String(exponent).replace('-', '−')}</sup>&nbsp;{unit}
    </span>
  )
}
