/** One segment: where it is, what it read, what the model expects and what follows. */
import { Link } from 'react-router'
import { Locator } from '#app/components/charts/locator.tsx'
import { IsolationTestsPanel } from '#app/components/isolation/tests-panel.tsx'
import { ClosedStretches } from '#app/components/permits/closed-stretches.tsx'
import { DangerPanel } from '#app/components/permits/danger-panel.tsx'
import { PermitsPanel } from '#app/components/permits/permits-panel.tsx'
import { CrossedPanel } from '#app/components/register/crossed-panel.tsx'
import { ButtonLink } from '#app/components/ui/button.tsx'
import { Instant } from '#app/components/ui/instant.tsx'
import { Notice } from '#app/components/ui/notice.tsx'
import { PageHead, Panel } from '#app/components/ui/panel.tsx'
import { StateMark } from '#app/components/ui/state-mark.tsx'
import type { AskedPressure } from '#app/domain/schemas/asked-pressure.ts'
import { SEGMENT_STATES } from '#app/domain/segment-states.ts'
import type { CrossedFindings } from '#app/services/crossed-suggestions.server.ts'
import type { SafetyNoticesData } from '#app/services/safety-notices.server.ts'
import type { SegmentPageData } from '#app/services/segment-page.server.ts'
import { BakePanel } from './bake-panel.tsx'
import { ForecastPanel } from './forecast-panel.tsx'
import { GaugesTable } from './gauges-table.tsx'
import { IonCurrentsPanel } from './ion-currents-panel.tsx'
import { SegmentChart } from './segment-chart.tsx'
import { SegmentEntries } from './segment-entries.tsx'
import { StateHistory } from './state-history.tsx'

export interface SegmentPageProps extends SegmentPageData {
  now: Date
  zone: string
  asked: AskedPressure
  safety: SafetyNoticesData
  may: {
    setState: boolean
    takeIn: boolean
    typeReading: boolean
    writeEntry: boolean
    recordTest: boolean
    draftPermit: boolean
    stateHeating: boolean
    tolerate: boolean
    editRegister: boolean
  }
  /** Comparison with the neighbours' channels; null when it was not asked for. */
  crossed: CrossedFindings | null
}

export function SegmentPage(props: SegmentPageProps) {
  const { segment, standing, may } = props
  const { tag } = segment
  const facts = SEGMENT_STATES[segment.state]
  return (
    <>
      <PageHead
        title={
          <>
            {tag}{' '}
            <span className="font-normal text-ink-2">
              {segment.startM} – {segment.endM} m
            </span>
          </>
        }
        crumbs={
          <>
            <Link to="/" className="link">
              Line
            </Link>{' '}
            / {tag}
          </>
        }
        actions={
          <>
            {may.writeEntry && <ButtonLink to={`/logbook/new?segment=${tag}`}>Write entry</ButtonLink>}
            {may.typeReading && <ButtonLink to={`/segments/${tag}/typed-reading`}>Type a reading</ButtonLink>}
            {may.setState && <ButtonLink to={`/segments/${tag}/state`}>Set state</ButtonLink>}
            {may.takeIn && (
              <ButtonLink to="/intake" kind="primary">
                Take in a log
              </ButtonLink>
            )}
          </>
        }
      >
        <StateMark
          state={segment.state}
          detail={
            segment.since === null ? undefined : (
              <>
                since <Instant at={segment.since} age />
              </>
            )
          }
        />
        <span className="block">
          {segment.endM - segment.startM} m × {segment.innerDiameterM.toFixed(2)} m, {segment.steel},{' '}
          {(segment.wallM * 1000).toFixed(1)} mm wall, {segment.vacuumFired ? 'fired in vacuum' : 'not fired'}
          , {segment.lastBakeYear === null ? 'never baked' : `last baked ${segment.lastBakeYear}`}
          {' · '}
          <Link to={`/register/segments/${tag}`} className="link">
            register entry
          </Link>
        </span>
      </PageHead>
      <div className="-mt-2 mb-4">
        <Locator along={props.along} here={tag} />
      </div>
      <DangerPanel events={props.safety.dangers} mayTolerate={may.tolerate} mayState={may.stateHeating} />
      <ClosedStretches closures={props.safety.closures} />
      {facts.hot && (
        <Notice tone="heat" lead="This segment is hot. ">
          Touch nothing on the word of a screen: measure the hottest point with a contact probe on site, keep
          to the permit and to local rules. Ebbline records and advises; it protects nobody.{' '}
          <Link to={`/segments/${tag}/heating`} className="link">
            What is known of its heating
          </Link>
        </Notice>
      )}
      {segment.state === 'vented' && (
        <Notice tone="warn" lead="Vented. ">
          Gas let out of a tube into a tunnel displaces oxygen. Follow the site's oxygen rules and carry a
          monitor; nothing here replaces it.{' '}
          <Link to={`/permits/bays?segment=${tag}`} className="link">
            Readings of oxygen
          </Link>
        </Notice>
      )}
      {standing.questions.map(({ tag: gauge, text }) => (
        <Notice key={gauge} tone="warn" lead="Reading questioned. ">
          {text}.
        </Notice>
      ))}
      <div className="grid items-start gap-x-4.5 xl:grid-cols-[minmax(0,1fr)_20.5rem]">
        <div className="min-w-0">
          <SegmentChart {...props} />
          <Panel title="Gauges">
            <GaugesTable gauges={props.gauges} />
            {props.crossed === null && (
              <p className="mt-2 print:hidden">
                <Link to="?compare#compared" preventScrollReset className="link">
                  Compare its channels with the neighbours’
                </Link>
              </p>
            )}
          </Panel>
          {props.crossed !== null && (
            <div id="compared">
              <CrossedPanel findings={props.crossed} mayEdit={may.editRegister} />
            </div>
          )}
          <IonCurrentsPanel tag={tag} currents={props.ionCurrents} from={props.curves.from} />
        </div>
        <div className="grid min-w-0 items-start gap-x-4.5 md:grid-cols-2 xl:grid-cols-1">
          <ForecastPanel {...props} />
          <BakePanel {...props} />
          <PermitsPanel
            permits={props.permits}
            empty="No permit has been drawn up for this segment yet."
            all={`/permits?group=all&segment=${tag}`}
            ask={may.draftPermit ? `/permits/new?segment=${tag}` : null}
          />
          <IsolationTestsPanel tag={tag} tests={props.isolationTests} mayRecord={may.recordTest} />
          <SegmentEntries tag={tag} entries={props.entries} />
          <StateHistory states={props.states} />
        </div>
      </div>
    </>
  )
}
