/** Holds the sources to the rules of the code base. Every test lists its offenders as file:line. */
import { expect, test } from 'vitest'
import { parseSource, readSources, type SourceFile } from '#tests/support/source-files.ts'

const sources = readSources('app')
const files = new Set(sources.map(({ path }) => path))

interface Layer {
  /** Folder the rule is for. */
  of: string
  /** Folders and files of ours it may import. */
  ours: readonly string[]
  /** Of these it may name types, which leave nothing behind when the code runs. */
  types?: readonly string[]
  /** Packages it may import; any when left out. */
  packages?: readonly string[]
}

/** Settings, log and machine time: for server code of every layer. */
const SERVER_GROUND = ['app/env.server.ts', 'app/log.server.ts', 'app/machine-time.server.ts']
/** Process entries share how they are told to stop. */
const ENTRY = ['app/cli/until-stopped.ts']

const LAYERS: readonly Layer[] = [
  {
    of: 'app/physics/',
    ours: ['app/physics/'],
    packages: ['ml-matrix', 'ml-levenberg-marquardt', 'jstat'],
  },
  {
    // Packages that compute and do nothing else: they run in a browser as well.
    of: 'app/domain/',
    ours: ['app/domain/', 'app/physics/'],
    packages: ['zod', 'papaparse', '@date-fns/tz', 'date-fns'],
  },
  {
    of: 'app/components/',
    ours: ['app/components/', 'app/hooks/', 'app/domain/', 'app/physics/'],
    types: ['app/services/', 'app/context.ts'],
  },
  {
    of: 'app/hooks/',
    ours: ['app/hooks/', 'app/domain/', 'app/physics/'],
    types: ['app/services/', 'app/context.ts'],
  },
  { of: 'app/db/', ours: ['app/db/', 'app/domain/', ...SERVER_GROUND] },
  {
    // Of sign-in only what judges a password: the rest of it rests on services.
    of: 'app/services/',
    ours: [
      'app/services/',
      'app/db/',
      'app/domain/',
      'app/physics/',
      'app/auth/password.ts',
      'app/auth/attempt-limit.server.ts',
      'seeds/demo-sign-ins.ts',
      ...SERVER_GROUND,
    ],
  },
  {
    of: 'app/auth/',
    ours: ['app/auth/', 'app/services/', 'app/db/', 'app/domain/', 'app/context.ts', ...SERVER_GROUND],
  },
  {
    of: 'app/worker/',
    ours: [
      'app/worker/',
      'app/services/',
      'app/auth/session.server.ts',
      'app/db/client.server.ts',
      'app/db/errors.server.ts',
      'app/domain/',
      // The demo's loggers, which only the demo loads.
      'seeds/feeder/',
      ...ENTRY,
      ...SERVER_GROUND,
    ],
  },
  {
    of: 'app/routes/',
    ours: [
      'app/routes/',
      'app/services/',
      'app/auth/',
      'app/components/',
      'app/hooks/',
      'app/server/',
      'app/domain/',
      'app/physics/',
      'app/context.ts',
      'app/db/client.server.ts',
      ...SERVER_GROUND,
    ],
  },
  {
    of: 'app/server/',
    ours: [
      'app/server/',
      'app/services/',
      'app/domain/',
      'app/db/client.server.ts',
      ...ENTRY,
      ...SERVER_GROUND,
    ],
  },
  { of: 'app/mail/', ours: ['app/mail/', 'app/domain/', ...ENTRY, ...SERVER_GROUND] },
]

function within(path: string, places: readonly string[]): boolean {
  return places.some((place) => (place.endsWith('/') ? path.startsWith(place) : path === place))
}

/** Imports of a layer's files that its rule does not allow. */
function wrongImports(layer: Layer, among: readonly SourceFile[]): string[] {
  const offenders: string[] = []
  for (const file of among.filter(({ path }) => path.startsWith(layer.of))) {
    for (const { line, target, typeOnly } of file.imports) {
      const allowed = isOurs(target)
        ? within(target, layer.ours) || (typeOnly && within(target, layer.types ?? []))
        : layer.packages === undefined || layer.packages.includes(packageOf(target))
      if (!allowed) offenders.push(`${file.path}:${line} imports ${target}`)
    }
  }
  return offenders
}

/** Types that the router generates beside a route, and style sheets, are nobody's layer. */
function isOurs(target: string): boolean {
  if (target.includes('/+types/') || target.endsWith('.css')) return false
  return /^(app|seeds|tests|drizzle)\//.test(target)
}

function packageOf(target: string): string {
  return target
    .split('/')
    .slice(0, target.startsWith('@') ? 2 : 1)
    .join('/')
}

function usesOutside(what: SourceFile['uses'][number]['what'], allowed: readonly string[]): string[] {
  return sources
    .filter(({ path }) => !within(path, allowed))
    .flatMap(({ path, uses }) => uses.filter((use) => use.what === what).map(({ line }) => `${path}:${line}`))
}

test.each(LAYERS.map((layer) => [layer.of, layer] as const))('%s imports only what it may', (_of, layer) => {
  expect(wrongImports(layer, sources)).toEqual([])
})

test('every folder has a rule, and every rule a folder', () => {
  const folders = new Set(
    sources.map(({ path }) => path.split('/').slice(0, 2).join('/')).filter((part) => !/\.tsx?$/.test(part)),
  )
  // The commands come last: they may import anything.
  folders.delete('app/cli')
  expect([...folders].map((folder) => `${folder}/`).sort()).toEqual(LAYERS.map(({ of }) => of).sort())
})

test('every import of ours names a file that is there, with its ending', () => {
  const missing = sources.flatMap(({ path, imports }) =>
    imports
      .filter(({ target }) => target.startsWith('app/') && isOurs(target) && !files.has(target))
      .map(({ line, target }) => `${path}:${line} imports ${target}`),
  )
  // The start commands run before anything is installed and are plain modules.
  expect(missing.filter((offender) => !offender.endsWith('.mjs'))).toEqual([])
})

test('no file imports itself, round however many others', () => {
  const next = new Map(
    sources.map(({ path, imports }) => [
      path,
      imports.filter(({ typeOnly }) => !typeOnly).map(({ target }) => target),
    ]),
  )
  const done = new Set<string>()
  const circles: string[] = []
  function walk(path: string, way: string[]): void {
    if (way.includes(path)) {
      circles.push([...way.slice(way.indexOf(path)), path].join(' > '))
      return
    }
    if (done.has(path)) return
    for (const target of next.get(path) ?? []) walk(target, [...way, path])
    done.add(path)
  }
  for (const path of next.keys()) walk(path, [])
  expect(circles).toEqual([])
})

test('settings are read in one place', () => {
  expect(usesOutside('process.env', ['app/env.server.ts', 'app/cli/'])).toEqual([])
})

test('the console is used in one place', () => {
  expect(usesOutside('console', ['app/log.server.ts', 'app/cli/'])).toEqual([])
})

test('the machine is asked for the time in one place', () => {
  expect(usesOutside('time of the machine', ['app/machine-time.server.ts'])).toEqual([])
})

test('only services open transactions', () => {
  expect(usesOutside('a transaction', ['app/db/transaction.server.ts'])).toEqual([])
  const openers = sources
    .filter(({ path }) => !within(path, ['app/services/', 'app/db/transaction.server.ts']))
    .flatMap(({ path, imports }) =>
      imports
        .filter(({ target }) => target === 'app/db/transaction.server.ts')
        .map(({ line }) => `${path}:${line}`),
    )
  expect(openers).toEqual([])
})

test('routes stay thin: at most 150 lines a file', () => {
  const long = sources
    .filter(({ path, lineCount }) => path.startsWith('app/routes/') && lineCount > 150)
    .map(({ path, lineCount }) => `${path} has ${lineCount} lines`)
  expect(long).toEqual([])
})

test('the chart library is imported by one file', () => {
  const importers = sources.filter(({ imports }) =>
    imports.some(({ target }) => packageOf(target) === 'uplot'),
  )
  expect(importers.map(({ path }) => path)).toEqual(['app/components/charts/uplot.tsx'])
})

test('only routes, and what the framework looks for, have a default export', async () => {
  const { readFileSync } = await import('node:fs')
  const allowed = ['app/routes/', 'app/root.tsx', 'app/routes.ts', 'app/entry.server.tsx']
  const offenders = sources
    .filter(({ path }) => !within(path, allowed))
    .flatMap(({ path }) =>
      readFileSync(path, 'utf8')
        .split('\n')
        .flatMap((text, index) => (/^export default\b/.test(text) ? [`${path}:${index + 1}`] : [])),
    )
  expect(offenders).toEqual([])
})

test('file names are in kebab case', () => {
  const named = sources.filter(
    ({ path }) => !/^[a-z0-9-]+(\.(server|client|d))?\.tsx?$/.test(path.split('/').at(-1) ?? ''),
  )
  expect(named.map(({ path }) => path)).toEqual([])
})

test('the checks themselves find what they look for', () => {
  const bad = parseSource(
    'app/domain/bad.ts',
    [
      "import { readFile } from 'node:fs/promises'",
      "import type { Db } from '../db/client.server.ts'",
      "import { good } from './good.ts'",
      "export { tx } from '#app/db/transaction.server.ts'",
      'export const now = () => [new Date(), Date.now(), new Date(5)]',
      "export const later = () => import('#app/services/clock.server.ts')",
      '// process.env and console.log in a comment, and "new Date()" in a string, are no uses',
      "export const text = 'console.log(new Date())'",
      'export const home = process.env.HOME ?? console.log(good)',
      'export const run = (db: Db) => db.transaction(async () => readFile)',
    ].join('\n'),
  )
  const layer = LAYERS.find(({ of }) => of === 'app/domain/')
  expect(layer && wrongImports(layer, [bad])).toEqual([
    'app/domain/bad.ts:1 imports node:fs/promises',
    'app/domain/bad.ts:2 imports app/db/client.server.ts',
    'app/domain/bad.ts:4 imports app/db/transaction.server.ts',
    'app/domain/bad.ts:6 imports app/services/clock.server.ts',
  ])
  expect(bad.uses.map(({ line, what }) => `${line} ${what}`)).toEqual([
    '5 time of the machine',
    '5 time of the machine',
    '9 process.env',
    '9 console',
    '10 a transaction',
  ])
})

test('types may be named where values may not be imported', () => {
  const page = parseSource(
    'app/components/page.tsx',
    [
      "import type { LinePageData } from '#app/services/line-page.server.ts'",
      "import { type LineGauge } from '#app/services/line-page.server.ts'",
      "import { type LineGauge, readLinePage } from '#app/services/line-page.server.ts'",
      'export const Page = (data: LinePageData & LineGauge) => <p>{String(readLinePage) + data.zone}</p>',
    ].join('\n'),
  )
  const layer = LAYERS.find(({ of }) => of === 'app/components/')
  expect(layer && wrongImports(layer, [page])).toEqual([
    'app/components/page.tsx:3 imports app/services/line-page.server.ts',
  ])
})
