/** The frame around every page: where one can go, whose site this is, what time it is here, and who is signed in. */
import { Form, Link, useLocation } from 'react-router'
import type { PressureUnit } from '#app/context.ts'
import { ROLE_LABELS, type Role } from '#app/domain/roles.ts'
import { usePlainCopy } from '#app/hooks/use-plain-copy.ts'
import { SiteProvider } from '#app/hooks/use-site.ts'
import { BrandMark } from './ui/brand-mark.tsx'
import { Menu } from './ui/menu.tsx'
import { Notice } from './ui/notice.tsx'
import { longTimeText, offsetLabel } from './ui/site-time.ts'
import { UnitSwitch } from './ui/unit-switch.tsx'

interface ShellProps {
  /** `waiting`: how many roles wait for this person to confirm or refuse them. */
  person: { name: string; roles: readonly Role[]; waiting: number }
  site: { name: string; zone: string }
  clock: { at: Date; demo: boolean }
  unit: PressureUnit
  /** `permits`: how many permits wait for this person. */
  places: { facility: boolean; people: boolean; permits: number }
  mayAdvanceClock: boolean
  notice: string | null
  children: React.ReactNode
}

interface Place {
  to: string
  label: string
  /** Beginnings of the addresses that belong to this place. */
  roots: readonly string[]
  /** How many things there wait for the reader. */
  waiting?: number
}

function placesFor(places: ShellProps['places']): Place[] {
  return [
    ...(places.facility
      ? [
          { to: '/', label: 'Line', roots: ['/segments'] },
          { to: '/intake', label: 'Log intake', roots: ['/intake'] },
        ]
      : []),
    { to: '/logbook', label: 'Logbook', roots: ['/logbook'] },
    ...(places.facility
      ? [
          { to: '/forecasts', label: 'Forecasts', roots: ['/forecasts'] },
          { to: '/bakes', label: 'Bakes', roots: ['/bakes'] },
          { to: '/permits', label: 'Permits', roots: ['/permits'], waiting: places.permits },
          { to: '/register', label: 'Register', roots: ['/register'] },
        ]
      : []),
    ...(places.people ? [{ to: '/people', label: 'People', roots: ['/people'] }] : []),
  ]
}

function isHere(place: Place, pathname: string): boolean {
  return (
    pathname === place.to || place.roots.some((root) => pathname === root || pathname.startsWith(`${root}/`))
  )
}

export function Shell({ person, site, clock, unit, places, mayAdvanceClock, notice, children }: ShellProps) {
  usePlainCopy()
  return (
    <SiteProvider value={{ zone: site.zone, now: clock.at, unit }}>
      <a
        href="#content"
        className="sr-only z-30 rounded-md bg-ink px-4 py-2.5 text-sheet focus:not-sr-only focus:fixed focus:top-2 focus:left-2 print:hidden"
      >
        Skip to the page
      </a>
      <div className="min-h-dvh md:grid md:grid-cols-[11.75rem_minmax(0,1fr)] print:block">
        <div className="md:sticky md:top-0 md:flex md:h-dvh md:flex-col md:border-r md:px-3.5 md:py-4 print:hidden">
          <Places places={placesFor(places)} home={places.facility ? '/' : '/logbook'} />
        </div>
        <div className="min-w-0 pb-16 md:pb-0">
          <header className="flex flex-wrap items-center gap-x-5 gap-y-1 border-b px-4 py-2 text-sm text-ink-2 md:px-6.5 print:hidden">
            <span className="flex items-center gap-2 font-medium text-ink">
              <BrandMark className="md:hidden" />
              {site.name}
            </span>
            <Clock clock={clock} zone={site.zone} mayAdvance={mayAdvanceClock} />
            <div className="ml-auto flex items-center gap-2">
              <UnitSwitch unit={unit} />
              <PersonMenu person={person} />
            </div>
          </header>
          <p className="hidden text-xs print:block">
            {site.name} · printed from Ebbline as of {longTimeText(clock.at, site.zone)} (
            {offsetLabel(clock.at, site.zone)}) by {person.name}
            {clock.demo && ' · demo data'}
          </p>
          <main
            id="content"
            tabIndex={-1}
            className="max-w-[82.5rem] px-4 pt-4 pb-10 outline-none md:px-6.5 print:px-0"
          >
            {notice !== null && <Notice announce="status">{notice}</Notice>}
            {children}
          </main>
        </div>
      </div>
    </SiteProvider>
  )
}

/** The rail on a wide screen; a bar at the bottom edge, in reach of the thumb, on a narrow one. */
function Places({ places, home }: { places: readonly Place[]; home: string }) {
  const { pathname } = useLocation()
  return (
    <nav
      aria-label="Places"
      className="fixed inset-x-0 bottom-0 z-20 border-t bg-paper md:static md:border-t-0 md:bg-transparent"
    >
      <Link
        to={home}
        className="mx-1.5 mb-4 hidden items-center gap-2 rounded-sm text-xl font-semibold tracking-head md:flex"
      >
        <BrandMark />
        Ebbline
      </Link>
      <ul className="flex overflow-x-auto md:flex-col md:gap-0.5 md:overflow-visible">
        {places.map((place) => (
          <li key={place.to} className="flex-auto">
            <Link
              to={place.to}
              aria-current={isHere(place, pathname) ? 'page' : undefined}
              className="relative flex min-h-14 items-center justify-center rounded-md px-1 text-center text-xs text-ink-2 hover:bg-sheet aria-[current]:bg-sheet aria-[current]:font-semibold aria-[current]:text-ink aria-[current]:shadow-[inset_0_3px_0_var(--color-vac)] md:min-h-10 md:justify-start md:px-2.5 md:text-left md:text-base md:aria-[current]:shadow-[inset_3px_0_0_var(--color-vac)] md:pointer-coarse:min-h-11"
            >
              {place.label}
              {place.waiting !== undefined && place.waiting > 0 && <WaitingCount count={place.waiting} />}
            </Link>
          </li>
        ))}
      </ul>
    </nav>
  )
}

/** A number in a ring; its words are for those who hear it. */
function WaitingCount({ count }: { count: number }) {
  return (
    <span className="absolute top-1 right-0 inline-flex min-w-5 justify-center rounded-full border border-edge bg-sheet px-1 text-xs font-semibold text-ink md:static md:ml-auto">
      {count}
      <span className="sr-only">{count === 1 ? ' waits for you' : ' wait for you'}</span>
    </span>
  )
}

function Clock({
  clock,
  zone,
  mayAdvance,
}: {
  clock: ShellProps['clock']
  zone: string
  mayAdvance: boolean
}) {
  return (
    <span>
      <time dateTime={clock.at.toISOString()} className="font-medium text-ink">
        {longTimeText(clock.at, zone)}
      </time>{' '}
      {offsetLabel(clock.at, zone)}
      {clock.demo && (
        <>
          {' · '}
          {mayAdvance ? (
            <Link to="/clock" className="link inline-block py-1">
              demo clock
            </Link>
          ) : (
            'demo clock'
          )}
        </>
      )}
    </span>
  )
}

function PersonMenu({ person }: { person: ShellProps['person'] }) {
  const item =
    'flex min-h-10 w-full items-center rounded-sm px-2.5 text-left text-ink hover:bg-rule-2 pointer-coarse:min-h-11'
  const waits = person.waiting === 1 ? 'One role waits for you' : `${person.waiting} roles wait for you`
  return (
    <Menu label={person.name} note={person.waiting > 0 ? waits : undefined}>
      <p className="px-2.5 pb-1.5 text-sm text-ink-3">
        {person.roles.map((role) => ROLE_LABELS[role]).join(', ') || 'No role in force'}
      </p>
      <ul className="border-t pt-1">
        {person.waiting > 0 && (
          <li>
            <Link to="/people/waiting" className={`${item} font-medium`}>
              {waits}
            </Link>
          </li>
        )}
        <li>
          <Link to="/account" className={item}>
            Your settings
          </Link>
        </li>
        <li>
          <Form method="post" action="/sign-out">
            <button type="submit" className={item}>
              Sign out
            </button>
          </Form>
        </li>
      </ul>
    </Menu>
  )
}
