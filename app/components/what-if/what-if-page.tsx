/** A segment with other numbers: the curve follows the hand, nothing is saved, and the address says what was tried. */
import { useCallback, useEffect, useMemo, useState } from 'react'
import { Link } from 'react-router'
import { Button, ButtonLink } from '#app/components/ui/button.tsx'
import { pressureWords } from '#app/components/ui/format-pressure.ts'
import { Notice } from '#app/components/ui/notice.tsx'
import { PageHead, Panel } from '#app/components/ui/panel.tsx'
import {
  type WhatIfField as Field,
  usualState,
  type WhatIfKey,
  type WhatIfMode,
  type WhatIfState,
  type WhatIfWall,
  whatIfFields,
} from '#app/domain/what-if.ts'
import { readWhatIfNumber, whatIfQuery } from '#app/domain/what-if-query.ts'
import { type WhatIfCurve, whatIfCorners } from '#app/domain/what-if-solve.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { WhatIfPageData } from '#app/services/what-if.server.ts'
import { useAddress } from './use-address.ts'
import { useWhatIfCurve } from './use-what-if-curve.ts'
import { WhatIfField } from './what-if-field.tsx'
import { spanText, WhatIfChart, WhatIfFacts } from './what-if-outcome.tsx'
import { Choice, CopyLink } from './what-if-parts.tsx'

const RESET = 'Back to the register’s'

export function WhatIfPage(props: WhatIfPageData) {
  const { tag, trial, excessTimes } = props
  return (
    <>
      <PageHead
        title={`What if: ${tag}`}
        crumbs={
          <>
            <Link to="/" className="link">
              Line
            </Link>{' '}
            /{' '}
            <Link to={`/segments/${tag}`} className="link">
              {tag}
            </Link>{' '}
            / What if
          </>
        }
        actions={
          <>
            <ButtonLink to={`/forecasts/${tag}`}>Forecast</ButtonLink>
            <ButtonLink to={`/bakes/options?segments=${encodeURIComponent(tag)}`}>Bake options</ButtonLink>
          </>
        }
      >
        Change the numbers and see what the model makes of them. Nothing here is saved, and no record changes.
      </PageHead>
      {excessTimes !== null && (
        <Notice tone="warn">
          {tag} now reads {excessTimes.toFixed(1)} times what the register's hydrogen gives. The curve starts
          from the register; try a leak or more hydrogen to come to what the gauge says.
        </Notice>
      )}
      {trial === null ? (
        <Notice tone="warn" lead="No trial without a model. ">
          The register must give {tag} a high-vacuum pump with its speeds for water and hydrogen, and the
          hydrogen of its steel.{' '}
          <Link to={`/register/segments/${tag}`} className="link">
            See its register entry
          </Link>
          .
        </Notice>
      ) : (
        <Trial {...props} trial={trial} />
      )}
    </>
  )
}

/** Without a key where there is none to begin with, the same object: nothing is made anew for it. */
function without(of: Partial<Record<WhatIfKey, string>>, key: WhatIfKey): Partial<Record<WhatIfKey, string>> {
  return of[key] === undefined ? of : { ...of, [key]: undefined }
}

type TrialProps = WhatIfPageData & { trial: NonNullable<WhatIfPageData['trial']> }

function Trial({ tag, trial, targetPa, measured, pumpGone }: TrialProps) {
  const { ground, asked, solved, usual } = trial
  const { unit } = useSite()
  const path = `/forecasts/${tag}/what-if`
  const fields = useMemo(() => whatIfFields(ground), [ground])
  const [state, setState] = useState<WhatIfState>(asked.state)
  const [typed, setTyped] = useState(asked.typed)
  const [errors, setErrors] = useState(asked.errors)
  const [alive, setAlive] = useState(false)
  useEffect(() => setAlive(true), [])
  const shown = useWhatIfCurve(ground, state, solved)
  const works = alive && shown.fault === null
  const query = whatIfQuery(ground, state)
  const address = query === '' ? path : `${path}?${query}`
  useAddress(path, address)

  const setNumber = useCallback(({ key }: Field, value: number) => {
    setState((before) => ({ ...before, numbers: { ...before.numbers, [key]: value } }))
    setErrors((before) => without(before, key))
  }, [])
  const onValue = useCallback(
    (field: Field, value: number) => {
      setTyped((before) => without(before, field.key))
      setNumber(field, value)
    },
    [setNumber],
  )
  const onTyped = useCallback(
    (field: Field, text: string) => {
      setTyped((before) => ({ ...before, [field.key]: text }))
      const read = readWhatIfNumber(field, text)
      if (read.error === null) setNumber(field, read.value)
      else
        setErrors((before) => ({
          ...before,
          [field.key]: `${read.error} The curve keeps the number before.`,
        }))
    },
    [setNumber],
  )
  // Once left, a number that is in use is written the short way; one that is not stays as typed beside its reason.
  const onLeave = useCallback(
    ({ key }: Field) => {
      if (errors[key] === undefined) setTyped((before) => without(before, key))
    },
    [errors],
  )
  function reset() {
    setState(usualState(ground))
    setTyped({})
    setErrors({})
  }

  const corners = whatIfCorners(ground, state)
  const inUse = fields.filter(({ mode }) => mode === 'both' || mode === state.mode)
  return (
    <div className="grid items-start gap-x-4.5 xl:grid-cols-[minmax(0,1fr)_25rem]">
      <div className="min-w-0 xl:sticky xl:top-4">
        {shown.refusal !== null && (
          <Notice tone="warn" lead="No curve for these numbers. ">
            {shown.refusal}
          </Notice>
        )}
        {pumpGone && (
          <Notice tone="plain" lead="No pump is at work here now. ">
            The trial begins with the last high-vacuum pump that was.
          </Notice>
        )}
        {shown.curve !== null && (
          <Panel title={state.mode === 'bake' ? 'Through the bake' : 'Pump-down'}>
            <WhatIfChart
              tag={tag}
              curve={shown.curve}
              mode={state.mode}
              usual={query === '' ? null : usual}
              measured={state.mode === 'pump-down' ? measured : null}
              targetPa={targetPa}
              corners={corners}
            />
            <p className="mt-2 text-sm text-ink-3">
              Full solution of flow and wall at the gauge, as an ion gauge shows it (nitrogen-equivalent); a
              model, not a promise. Water below 10⁻¹⁰ Pa is not shown: nobody knows it.{' '}
              <span data-solved={shown.grade}>{solvedWords(shown)}</span>
            </p>
          </Panel>
        )}
      </div>
      <form
        action={path}
        method="get"
        className="min-w-0"
        onSubmit={(event) => works && event.preventDefault()}
      >
        {shown.curve !== null && (
          <Panel title="What comes of it">
            <WhatIfFacts curve={shown.curve} mode={state.mode} targetPa={targetPa} corners={corners} />
            <p role="status" className="sr-only">
              {shown.grade === 'at-rest' ? endWords(shown.curve, unit) : ''}
            </p>
          </Panel>
        )}
        <Panel
          title="What is tried"
          aside={
            works ? (
              <Button type="button" className="text-sm" onClick={reset}>
                {RESET}
              </Button>
            ) : (
              <ButtonLink to={path} className="text-sm">
                {RESET}
              </ButtonLink>
            )
          }
        >
          {shown.fault !== null && (
            <p className="mb-2 text-bad">
              The part of this page that solves has stopped: {shown.fault}. Numbers can still be sent to the
              server with the button below.
            </p>
          )}
          <Choice<WhatIfMode>
            legend="What"
            name="mode"
            value={state.mode}
            options={[
              { value: 'pump-down', label: 'Pumping' },
              { value: 'bake', label: 'A bake' },
            ]}
            onChange={(mode) => setState((before) => ({ ...before, mode }))}
          />
          <Choice<WhatIfWall>
            legend="Wall at the start"
            name="wall"
            value={state.wall}
            options={[
              { value: 'wet', label: 'Wet, as after a vent' },
              { value: 'dry', label: 'Dry, as after a bake' },
            ]}
            onChange={(wall) => setState((before) => ({ ...before, wall }))}
          />
          {inUse.map((field) => (
            <WhatIfField
              key={field.key}
              field={field}
              value={state.numbers[field.key]}
              typed={typed[field.key]}
              error={errors[field.key]}
              alive={works}
              onValue={onValue}
              onTyped={onTyped}
              onLeave={onLeave}
            />
          ))}
          {works ? <CopyLink address={address} /> : <Button kind="primary">Work it out</Button>}
        </Panel>
      </form>
    </div>
  )
}

function solvedWords({ by, grade }: ReturnType<typeof useWhatIfCurve>): string {
  if (by.who === 'server') return 'Solved by the server.'
  const ms = `${by.ms.toFixed(0)} ms`
  return grade === 'moving'
    ? `Solved in this browser in ${ms}, coarse while the numbers move.`
    : `Solved in this browser in ${ms}.`
}

function endWords({ hours, pa }: WhatIfCurve, unit: Parameters<typeof pressureWords>[1]): string {
  return `After ${spanText(hours.at(-1) ?? 0)}: ${pressureWords(pa.at(-1) ?? 0, unit)}.`
}
