/** Cautions about gas: venting, lack of oxygen, the inside of the tube, cylinders. */
import { AIR_OXYGEN_PERCENT, coverForce, oxygenAfterInflow } from '../../physics/hazards.ts'
import type { HazardFact, HazardFinding, HazardGround } from '../hazards.ts'
import { figure, named, notYet, PRACTICE, REGISTER, TEXTBOOK } from './figures.ts'

const BAR_PA = 1e5

type Segment = HazardGround['segments'][number]

/** Inside of a segment, m³. */
export function volumeOf({ innerDiameterM, startM, endM }: Segment): number {
  return (Math.PI / 4) * innerDiameterM ** 2 * (endM - startM)
}

export function ventPressure(ground: HazardGround): HazardFinding {
  const { segments } = ground
  const relief = ground.adopted['vent-overpressure']
  const facts: HazardFact[] = segments.map((segment) => ({
    name: `Gas to fill ${segment.tag}`,
    value: figure(volumeOf(segment), 'm³', 1),
    how: `π/4 × (${figure(segment.innerDiameterM, 'm')})² × ${figure(segment.endM - segment.startM, 'm')}, at the pressure of the tunnel.`,
    source: REGISTER,
  }))
  if (relief !== undefined) {
    for (const segment of segments)
      facts.push({
        name: `Push on a blank of ${segment.tag} at ${figure(relief, 'bar')}`,
        value: figure(coverForce(segment.innerDiameterM, relief * BAR_PA) / 1000, 'kN', 1),
        how: `${figure(relief, 'bar')} over the tunnel on a disc of ${figure(segment.innerDiameterM, 'm')}, outwards.`,
        source: TEXTBOOK,
      })
  }
  return {
    facts,
    findings: [],
    thresholds: ['vent-overpressure'],
    precautions: [
      'Thin tube and bellows are made for pressure from outside and give way to little from inside: fit a relief and try it first.',
      'Let gas in through a regulator, never straight from a cylinder, and stay at its valve until it is shut.',
      'Keep the vent valve locked shut while this permit is live.',
    ],
  }
}

export function oxygen(ground: HazardGround): HazardFinding {
  const { segments, bay } = ground
  const low = ground.adopted['oxygen-low']
  const facts: HazardFact[] = []
  const findings: string[] = []
  const [first] = segments
  if (first !== undefined) {
    const largest = segments.reduce((a, b) => (volumeOf(b) > volumeOf(a) ? b : a), first)
    const one = volumeOf(largest)
    const two = segments.length > 1 ? segments.reduce((sum, each) => sum + volumeOf(each), 0) : 2 * one
    const whose = segments.length > 1 ? named(segments) : `${first.tag} and one more of its size`
    for (const [gasM3, what] of [
      [one, `one segment (${largest.tag})`],
      [two, `two segments (${whose})`],
    ] as const) {
      const left = oxygenAfterInflow(gasM3, bay.volumeM3)
      facts.push({
        name: `Oxygen after venting ${what} into the bay`,
        value: figure(left, '%', 1),
        how: `${figure(AIR_OXYGEN_PERCENT, '%')} × e^(−${figure(gasM3, 'm³', 1)} / ${figure(bay.volumeM3, 'm³', 0)}): mixed evenly, no fan; bay: ${bay.basis}.`,
        source: TEXTBOOK,
      })
      if (low !== undefined && left < low)
        findings.push(
          `Venting ${what} into this bay would leave ${figure(left, '%', 1)} oxygen, below the ${figure(low, '%')} at which everybody leaves.`,
        )
    }
    facts.push({
      name: 'In pits and at the outlet',
      value: 'far lower, down to none',
      how: 'Cold or heavy gas lies where it comes out; the figures above hold only once all of it has mixed.',
      source: PRACTICE,
    })
  } else {
    facts.push({
      name: 'Oxygen after venting into the bay',
      value: notYet('which segment'),
      how: 'From the volume of the segment and that of the bay.',
      source: TEXTBOOK,
    })
  }
  return {
    facts,
    findings,
    thresholds: ['oxygen-low', 'oxygen-high', 'oxygen-release'],
    precautions: [
      'Lack of oxygen gives no warning: judgement goes first, then the legs.',
      'See the fans run; use a fixed monitor and one on each person. Test before going in, then without a break.',
      'At an alarm, leave. Do not go in without breathing apparatus for somebody who lies there: those who tried make up a large share of the dead.',
      'Lead what is vented outside through a duct; leave no hose connected that can carry nitrogen or helium.',
      'Hang the suffocation sign (ISO 7010 W041) at each way in.',
    ],
  }
}

export function tubeEntry({ segments }: HazardGround): HazardFinding {
  return {
    facts: segments.map((segment) => ({
      name: `Inside of ${segment.tag}`,
      value: `${figure(segment.innerDiameterM, 'm')} wide, ${figure(segment.endM - segment.startM, 'm')} long`,
      how: 'Between its gate valves.',
      source: REGISTER,
    })),
    findings: [],
    thresholds: ['oxygen-low'],
    precautions: [
      'An opened tube is a confined space. Going in, head or arm, needs an entry permit of its own; this one never covers it.',
      'Cover or bar an open end as soon as nobody works at it.',
    ],
  }
}

export function gasCylinders(): HazardFinding {
  return {
    facts: [],
    findings: [],
    thresholds: ['oxygen-low'],
    precautions: [
      'Chain cylinders, cap them when they are not in use, and keep them well away from what is hot.',
      'Look regulator and hose over before each use, and shut the cylinder afterwards.',
      'Tracer gas in ducts and pits drives out air as nitrogen does: keep the oxygen monitor on.',
    ],
  }
}
