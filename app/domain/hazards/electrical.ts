/** Cautions about current: shock, arcs, magnetic field, disturbed instruments, X-ray. */
import { fieldDistance, jointHeat, straightConductorField } from '../../physics/hazards.ts'
import { ampsAndVolts } from '../bake-load.ts'
import type { HazardFact, HazardFinding, HazardGround } from '../hazards.ts'
import { figure, named, notYet, PRACTICE, REGISTER, TEXTBOOK, THIS_PERMIT } from './figures.ts'

/** A joint as it may be found when it was bolted carelessly, Ω (common practice, no source). */
const POOR_JOINT_OHM = 1e-4
/** Where a person stands beside a bar, m. */
const BESIDE_M = 0.5

interface Load {
  ramp: { amps: number; volts: number }
  soak: { amps: number; volts: number }
}

/** Current and voltage of the heating by the tube's own resistance; null where the permit does not heat that way. */
function loadOf({ content, segments, ambientC, supply }: HazardGround): Load | null {
  const { maxCelsius, rampKH } = content
  if (supply === null || maxCelsius === null || rampKH === null || segments.length === 0) return null
  return {
    ramp: ampsAndVolts(segments, ambientC, maxCelsius, rampKH),
    soak: ampsAndVolts(segments, ambientC, maxCelsius, 0),
  }
}

/** The current that cautions count with: the permit's limit, or what the end of the ramp takes where that is more. */
function countedAmps(ground: HazardGround): { amps: number; basis: string } | null {
  const load = loadOf(ground)
  const allowed = ground.content.maxAmps
  if (load === null)
    return allowed === null ? null : { amps: allowed, basis: 'highest current of the permit' }
  if (allowed !== null && allowed >= load.ramp.amps)
    return { amps: allowed, basis: 'highest current of the permit' }
  return { amps: load.ramp.amps, basis: 'computed current at the end of the ramp' }
}

const RESISTANCE =
  'resistance of the register at 20 °C, carried on to the temperature by the law of the steel'

export function shock(ground: HazardGround): HazardFinding {
  const { content, segments, supply, heaters } = ground
  const guarded = ground.adopted['shock-volts']
  const facts: HazardFact[] = []
  const findings: string[] = []
  const load = loadOf(ground)
  if (load !== null) {
    facts.push(
      {
        name: 'Across the bars, end of the ramp',
        value: `${figure(load.ramp.volts, 'V', 1)} at ${figure(load.ramp.amps, 'A', 0)}`,
        how: `${named(segments)} in one loop: current from the power that the ramp of ${figure(content.rampKH ?? 0, 'K/h')} takes at the top, voltage from the ${RESISTANCE}; cables left out.`,
        source: `Ohm’s law, ${TEXTBOOK}; ${REGISTER}`,
      },
      {
        name: 'Across the bars, soak',
        value: `${figure(load.soak.volts, 'V', 1)} at ${figure(load.soak.amps, 'A', 0)}`,
        how: 'The same without the climb.',
        source: `Ohm’s law, ${TEXTBOOK}; ${REGISTER}`,
      },
    )
    if (content.maxVolts !== null && load.ramp.volts > content.maxVolts)
      findings.push(
        `The end of the ramp takes ${figure(load.ramp.volts, 'V', 1)}, more than the ${figure(content.maxVolts, 'V')} of the permit.`,
      )
    if (content.maxAmps !== null && load.ramp.amps > content.maxAmps)
      findings.push(
        `The end of the ramp takes ${figure(load.ramp.amps, 'A', 0)}, more than the ${figure(content.maxAmps, 'A')} of the permit.`,
      )
  } else if (content.supply === null) {
    facts.push({
      name: 'Current through the tube',
      value: 'no supply set is named',
      how: 'Without one, no voltage across the tube is worked out.',
      source: THIS_PERMIT,
    })
  }
  const open = Math.max(content.openCircuitVolts ?? 0, supply?.openCircuitVolts ?? 0)
  if (open > 0)
    facts.push({
      name: 'Across a joint that opens',
      value: figure(open, 'V'),
      how: 'Voltage of the set without load: it stands across any gap while the set is on, whatever the loop takes.',
      source: supply === null ? THIS_PERMIT : `${REGISTER}, ${supply.tag}`,
    })
  facts.push(earthing(ground), ...blankets(heaters))
  if (guarded !== undefined) {
    const above = [
      ...(load === null ? [] : [{ where: 'across the bars at the end of the ramp', volts: load.ramp.volts }]),
      { where: 'across an open joint', volts: open },
      ...heaters.map(({ tag, volts }) => ({ where: `at ${tag}`, volts: volts ?? 0 })),
    ].filter(({ volts }) => volts >= guarded)
    if (above.length > 0)
      findings.push(
        `${above.map(({ where, volts }) => `${figure(volts, 'V', volts % 1 === 0 ? 0 : 1)} ${where}`).join(', ')}: at or above the ${figure(guarded, 'V')} from which this site guards live parts and works on them only when dead.`,
      )
  }
  return {
    facts,
    findings,
    thresholds: ['shock-volts'],
    precautions: [
      'Only the qualified person named here opens covers, clamps or links.',
      'Lock the feed off, prove the tester, test each segment for absence of voltage, prove the tester again; then short and earth before anything is touched.',
      'Keep covers on bars and clamps; no rings, watches, metal tapes or loose tools near them.',
      'Earth the loop at the one point written above. A strap, a tray or a ladder across it makes a second path: look for one before switching on.',
      'Try the earth-fault monitor before the first current. Stand on a rubber mat at the clamps.',
      'Few volts, much energy: a dropped spanner welds.',
    ],
  }
}

function earthing({ content, heaters }: HazardGround): HazardFact {
  const onRegister = heaters
    .filter(({ kind, earthing: where }) => kind === 'direct-current' && where !== '')
    .map(({ tag, earthing: where }) => `${tag}: ${where}`)
    .join('; ')
  const known = content.earthing !== '' ? content.earthing : onRegister
  return {
    name: 'Earthing point of the loop',
    value: known === '' ? notYet('where') : known,
    how: 'Earthed at its middle, each end of the loop stands at half the voltage to earth; earthed at one end, the other stands at all of it.',
    source: content.earthing !== '' ? THIS_PERMIT : REGISTER,
  }
}

function blankets(heaters: HazardGround['heaters']): HazardFact[] {
  return heaters
    .filter(({ kind, volts }) => kind === 'blanket' && volts !== null)
    .map(({ tag, volts, powerW }) => ({
      name: `Blankets ${tag}`,
      value: `${figure(volts ?? 0, 'V')}${powerW === null ? '' : `, ${figure(powerW / 1000, 'kW')}`}`,
      how: 'Mains voltage at the valve box, the cross and the gauges.',
      source: REGISTER,
    }))
}

export function arc(ground: HazardGround): HazardFinding {
  const counted = countedAmps(ground)
  const limit = ground.adopted['joint-resistance']
  const facts: HazardFact[] = []
  if (counted !== null) {
    const heatOf = (ohm: number, name: string, source: string): HazardFact => ({
      name,
      value: figure(jointHeat(counted.amps, ohm), 'W', 0),
      how: `${figure(counted.amps, 'A', 0)} (${counted.basis}) squared, times ${figure(ohm * 1000, 'mΩ')}.`,
      source,
    })
    facts.push(heatOf(POOR_JOINT_OHM, 'Heat in a joint of 0.1 mΩ', `Joule’s law, ${TEXTBOOK}`))
    if (limit !== undefined)
      facts.push(
        heatOf(limit / 1000, `Heat in a joint of ${figure(limit, 'mΩ')}`, `Joule’s law, ${TEXTBOOK}`),
      )
  } else {
    facts.push({
      name: 'Heat in a joint of 0.1 mΩ',
      value: notYet('the current'),
      how: 'Current squared, times resistance.',
      source: TEXTBOOK,
    })
  }
  return {
    facts,
    findings: [],
    thresholds: ['joint-resistance'],
    precautions: [
      'Tighten every joint to its torque and measure it with a micro-ohmmeter before the first current.',
      'Look at them with a thermal camera at a tenth, at half and at full current; stop at the first that is warmer than its neighbours.',
      'Keep covers on, what burns half a metre away, and everybody from in front of a joint while the current changes.',
      'Never open a link that carries current: direct current does not go out by itself.',
    ],
  }
}

export function magneticField(ground: HazardGround): HazardFinding {
  const counted = countedAmps(ground)
  const limit = ground.adopted['implant-field']
  const facts: HazardFact[] = []
  const findings: string[] = []
  if (counted === null) {
    facts.push({
      name: 'Field beside a bar',
      value: notYet('the current'),
      how: 'Falls with the distance from the bar.',
      source: TEXTBOOK,
    })
  } else {
    const beside = straightConductorField(counted.amps, BESIDE_M) * 1000
    facts.push({
      name: `Field at ${figure(BESIDE_M, 'm')} of a single bar`,
      value: figure(beside, 'mT', 2),
      how: `2×10⁻⁷ T·m/A times ${figure(counted.amps, 'A', 0)} (${counted.basis}) over the distance; a return bar beside it makes it smaller.`,
      source: `Ampère’s law, ${TEXTBOOK}`,
    })
    if (limit !== undefined) {
      const distance = fieldDistance(counted.amps, limit / 1000)
      facts.push({
        name: `Distance to ${figure(limit, 'mT')}`,
        value: figure(distance, 'm', 2),
        how: 'The same, solved for the distance.',
        source: `Ampère’s law, ${TEXTBOOK}`,
      })
      if (beside >= limit)
        findings.push(
          `Within ${figure(distance, 'm', 2)} of a single bar the field is above the ${figure(limit, 'mT')} for people with implants.`,
        )
    }
  }
  return {
    facts,
    findings,
    thresholds: ['implant-field'],
    precautions: [
      'Run the return bar beside the feed bar wherever it goes.',
      'Hang the magnet sign (ISO 7010 W006) and a notice for people with pacemakers and other implants at each way in.',
      'Leave bank cards, watches and loose steel tools outside.',
    ],
  }
}

export function radioNoise({ supply, content }: HazardGround): HazardFinding {
  return {
    facts: [
      {
        name: 'Source',
        value: supply?.tag ?? (content.supply === null ? 'no supply set is named' : content.supply),
        how: 'Supply sets switch fast and disturb gauges and thermocouples nearby; no radio power is made on purpose.',
        source: PRACTICE,
      },
    ],
    findings: [],
    thresholds: [],
    precautions: [
      'A reading that jumps as the set is switched is doubtful until it repeats with the set off.',
      'It hurts nobody while the set is closed. Inside an open set there is mains and stored charge: the electrician’s business.',
    ],
  }
}

export function xRay(): HazardFinding {
  return {
    facts: [],
    findings: [],
    thresholds: [],
    precautions: [
      'Pumps and gauges inside a metal wall let next to nothing out (from memory, not verified).',
      'Glass, windows and conditioning at high voltage are another matter: the radiation adviser of the site decides before work begins.',
    ],
  }
}
