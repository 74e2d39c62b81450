/** Hazards of the permit form: what is known of each here, and whether it applies. Nothing is answered beforehand. */
import { STANDING_SENTENCE } from '#app/domain/hazards.ts'
import type { PermitFormData } from '#app/services/permit-form.server.ts'
import { Lines, Radios } from './permit-fields.tsx'

const APPLIES = [
  { value: 'yes', label: 'Applies' },
  { value: 'no', label: 'Does not apply' },
]

type Hazard = PermitFormData['hazards'][number]

export function HazardAnswers({ hazards }: Pick<PermitFormData, 'hazards'>) {
  return (
    <>
      <p className="mb-3 text-ink-2">
        Figures are worked out for these segments from what was saved last. Answer each; where one does not
        apply, say why.
      </p>
      <ol>
        {hazards.map((hazard) => (
          <li key={hazard.key} className="border-t py-4 first:border-t-0 first:pt-0">
            <h3 className="mb-2 font-semibold">{hazard.label}</h3>
            <div className="grid gap-x-6 lg:grid-cols-2">
              <HazardFacts hazard={hazard} />
              <div className="min-w-0">
                <Radios
                  name={`hazards.${hazard.key}.applies`}
                  label={`${hazard.label}: does it apply here?`}
                  options={APPLIES}
                  quiet
                />
                <Lines
                  name={`hazards.${hazard.key}.text`}
                  label={
                    <>
                      Precautions at this segment, or why it does not apply
                      <span className="sr-only"> ({hazard.label})</span>
                    </>
                  }
                />
              </div>
            </div>
          </li>
        ))}
      </ol>
      <p className="border-t pt-3 text-sm text-ink-2">{STANDING_SENTENCE}</p>
    </>
  )
}

function HazardFacts({ hazard: { facts, findings, precautions, thresholds } }: { hazard: Hazard }) {
  const unset = thresholds.filter(({ standing }) => standing !== 'in-force')
  return (
    <div className="mb-3 min-w-0">
      {findings.map((finding) => (
        <p key={finding} className="mb-2 border-l-4 border-heat bg-heat-soft px-2.5 py-1.5">
          {finding}
        </p>
      ))}
      {facts.length > 0 && (
        <dl className="mb-2 text-sm">
          {facts.map(({ name, value }) => (
            <div key={name} className="flex flex-wrap justify-between gap-x-4 py-0.5">
              <dt className="text-ink-2">{name}</dt>
              <dd className="font-medium">{value}</dd>
            </div>
          ))}
        </dl>
      )}
      {unset.map(({ key, label, text }) => (
        <p key={key} className="mb-2 text-sm text-warn">
          {label}: {text}. It has to be adopted by a safety officer before this permit can be approved.
        </p>
      ))}
      <p className="text-sm font-medium">Usual precautions</p>
      <ul className="list-disc pl-5 text-sm text-ink-2">
        {precautions.map((precaution) => (
          <li key={precaution}>{precaution}</li>
        ))}
      </ul>
    </div>
  )
}
