/**
 * `npm start`: brings what is missing, starts database, mail fake, worker and web server, waits until they answer,
 * and stops them all, the database last, when told to or when one of them dies.
 */
import { dirname, join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { ensureBuild } from './build-stamp.mjs'
import { ensureDataFolder, keptSecret, placeForDatabase } from './data-folder.mjs'
import { databaseUser } from './database-user.mjs'
import { CommandFailure, sentenceFor } from './failure.mjs'
import { takeLock } from './lock.mjs'
import { DATABASE_PACKAGES, startMariadb } from './mariadb.mjs'
import { ensureDebianPackages, ensureNpmPackages } from './packages.mjs'
import { ensureSeeded, migrate } from './prepare-database.mjs'
import { killAll, stop } from './processes.mjs'
import { healthy, startService, whyItEnded } from './services.mjs'
import { checkPort, readSettings } from './settings.mjs'
import { step } from './steps.mjs'

const SERVICES_STOP_WITHIN_MS = 4_500
const root = dirname(dirname(dirname(fileURLToPath(import.meta.url))))

/** @type {import('./services.mjs').Service[]} */
const services = []
/** @type {Awaited<ReturnType<typeof startMariadb>> | undefined} */
let database
/** @type {Awaited<ReturnType<typeof takeLock>> | undefined} */
let lock

/** @returns {Promise<string>} the signal */
function toldToStop() {
  return new Promise((resolve) => {
    // They stay installed: a second signal during the stop must not cut it short.
    for (const signal of ['SIGINT', 'SIGTERM', 'SIGHUP']) process.on(signal, () => resolve(signal))
  })
}

async function startUp() {
  const { env, host, port, demo } = readSettings(root)
  const dataFolder = ensureDataFolder(root)
  lock = await takeLock(join(dataFolder, 'running.json'))
  if (lock.cleared > 0)
    console.log(`The last start was cut off; ${lock.cleared} process(es) of it had to be ended.`)
  await checkPort(host, port)
  env.SESSION_SECRET ??= keptSecret(join(dataFolder, 'session-secret'))
  if (demo) env.FEEDER_TOKEN ??= keptSecret(join(dataFolder, 'feeder-token'))

  await step('packages', 'installing npm packages', async (say) => say(await ensureNpmPackages(root)))
  // Three things that do not wait for each other, on however many cores there are.
  await Promise.all([prepareDatabase(dataFolder, env, demo), prepareBuild(env), prepareMail(dataFolder, env)])
  // The worker comes second: in the demo it posts to the web server, whose port may be any free one.
  const facts = await startWeb(env, host)
  env.API_URL ??= facts.address
  await startWorker(env)
  return facts
}

/**
 * @param {string} dataFolder
 * @param {NodeJS.ProcessEnv} env gets DATABASE_URL
 * @param {boolean} demo
 */
async function prepareDatabase(dataFolder, env, demo) {
  env.DATABASE_URL ??= await step('database', 'starting the database server', (say) =>
    ownDatabase(dataFolder, say),
  )
  const { empty } = await step('tables', 'migrating', (say) => migrate({ root, env, say }))
  await step('demo data', 'seeding the demo facility', (say) => ensureSeeded({ root, env, demo, empty, say }))
}

/** @param {NodeJS.ProcessEnv} env */
async function prepareBuild(env) {
  await step('build', 'building', async (say) => say(await ensureBuild(root, env)))
}

/**
 * @param {string} dataFolder
 * @param {NodeJS.ProcessEnv} env gets SMTP_URL and MAIL_FAKE_URL, unless a mail server is set
 */
async function prepareMail(dataFolder, env) {
  if (env.SMTP_URL !== undefined) return
  await step('mail', 'starting the mail fake', async (say) => {
    const facts = await service('mail fake', 'app/mail/fake-main.ts', env, [join(dataFolder, 'mail')])
    env.SMTP_URL = String(facts.smtpUrl)
    env.MAIL_FAKE_URL = String(facts.httpUrl)
    say(`kept, not sent; to read at ${env.MAIL_FAKE_URL}/messages`)
  })
}

/** @param {NodeJS.ProcessEnv} env */
async function startWorker(env) {
  await step('worker', 'starting the worker', async (say) => {
    await service('worker', 'app/worker/main.ts', env)
    say('at work')
  })
}

/** @param {NodeJS.ProcessEnv} env @param {string} host */
async function startWeb(env, host) {
  return await step('web', 'starting the web server', async (say) => {
    const facts = await service('web server', 'app/server/main.ts', env)
    const address = `http://${host.includes(':') ? `[${host}]` : host}:${facts.port}`
    await healthy(address)
    lock?.answersAt(address)
    say(`answers on ${address}`)
    return { address, signIns: facts.signIns }
  })
}

/**
 * @param {string} dataFolder
 * @param {(detail: string) => void} say
 */
async function ownDatabase(dataFolder, say) {
  await ensureDebianPackages(DATABASE_PACKAGES)
  const { folder, user, remark = '' } = placeForDatabase(dataFolder, databaseUser())
  const password = keptSecret(join(dataFolder, 'database-password'))
  database = await startMariadb({
    folder,
    user,
    password,
    options: ['--innodb-buffer-pool-size=256M'],
    started: (program) => lock?.note('database', program.pid),
  })
  say(`ready on 127.0.0.1:${database.port}${remark}`)
  return database.url('ebbline')
}

/**
 * @param {string} name
 * @param {string} file
 * @param {NodeJS.ProcessEnv} env
 * @param {string[]} [args]
 */
function service(name, file, env, args) {
  return startService(name, {
    root,
    file,
    args,
    env,
    started(started) {
      services.push(started)
      lock?.note(name, started.pid)
    },
  })
}

/** Web server, worker and mail first, all at once; the database when nobody uses it any more. */
async function stopAll() {
  killAll([...services, ...(database === undefined ? [] : [database.program])])
  await Promise.all(services.map((started) => stop(started, { graceMs: SERVICES_STOP_WITHIN_MS })))
  await database?.stop()
  lock?.release()
}

/** @param {{ address: string, signIns: unknown }} ready */
function greeting({ address, signIns }) {
  const people = Array.isArray(signIns) ? signIns : []
  const rows = people.map(({ role, name, email, password }) => {
    return `  ${String(role).padEnd(16)} ${String(name).padEnd(20)} ${String(email).padEnd(24)} ${password}`
  })
  const signIn = rows.length === 0 ? [] : ['', 'Sign in as', ...rows]
  return ['', `Ebbline is ready: ${address}`, ...signIn, '', 'Stop it with Ctrl-C.'].join('\n')
}

/** Rejects when one of the processes that must run has ended. */
function firstDeath() {
  const deaths = services.map(({ name, ended, lastLines }) => ended.then(() => whyItEnded(name, lastLines())))
  if (database !== undefined) {
    const { program } = database
    deaths.push(program.ended.then(() => whyItEnded('database server', program.lastLines())))
  }
  return Promise.race(deaths).then((sentence) => {
    throw new CommandFailure(sentence)
  })
}

// Whoever reads our output may be gone first (a closed terminal); the stop must still be an orderly one.
for (const stream of [process.stdout, process.stderr]) stream.on('error', () => {})

const told = toldToStop()
const up = startUp()
try {
  const ready = await Promise.race([up, told])
  if (typeof ready !== 'string') console.log(greeting(ready))
  const signal = await Promise.race([told, firstDeath()])
  const began = performance.now()
  console.log(`\nStopping (${signal}) …`)
  // A start that was still under way ends by what it waits for being ended.
  up.catch(() => {})
  await stopAll()
  console.log(`Stopped in ${((performance.now() - began) / 1000).toFixed(1)} s.`)
  process.exit(typeof ready === 'string' ? 130 : 0)
} catch (error) {
  console.error(`\n${sentenceFor(error)}`)
  if (error instanceof CommandFailure && error.lines.length > 0) console.error(error.lines.join('\n'))
  await stopAll()
  process.exit(1)
}
