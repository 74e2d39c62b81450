/** Cautions about force and people: growth of the tube, load of the air on it, lifting, working alone. */
import { coverForce, evacuatedEnergy, SHEET_EXPANSION_PER_K } from '../../physics/hazards.ts'
import { expansionM } from '../../physics/thermal.ts'
import { celsiusToKelvin } from '../../physics/units.ts'
import type { HazardFact, HazardFinding, HazardGround } from '../hazards.ts'
import { figure, notYet, PRACTICE, REGISTER, TEXTBOOK, THIS_PERMIT } from './figures.ts'
import { volumeOf } from './gas.ts'

const GRAVITY = 9.80665

export function expansion(ground: HazardGround): HazardFinding {
  const { content, ambientC, segments } = ground
  const wanted = ground.adopted['stroke-reserve']
  const hot = content.maxCelsius
  const facts: HazardFact[] = []
  const findings: string[] = []
  for (const segment of segments) {
    if (hot === null || hot <= ambientC) continue
    const lengthM = segment.endM - segment.startM
    const growthMm = SHEET_EXPANSION_PER_K * (hot - ambientC) * lengthM * 1000
    const lawMm = expansionM(lengthM, celsiusToKelvin(ambientC), celsiusToKelvin(hot)) * 1000
    // The larger of the two: a joint that runs out of stroke is no place for the kinder figure.
    const strokeMm = Math.max(growthMm, lawMm) / segment.bellowsCount
    const reserve = (1 - strokeMm / segment.bellowsRatedMm) * 100
    facts.push(
      {
        name: `Growth of ${segment.tag}`,
        value: figure(growthMm, 'mm', 0),
        how: `17.3×10⁻⁶/K × ${figure(hot - ambientC, 'K')} × ${figure(lengthM, 'm')}; by the temperature law of the bake plan ${figure(lawMm, 'mm', 0)}.`,
        source:
          'data sheets of 304L, mean of 0 to 100 °C; law of EN 1993-1-2 annex C from memory, not verified',
      },
      {
        name: `Each joint of ${segment.tag}`,
        value: `${figure(strokeMm, 'mm', 1)} of ${figure(segment.bellowsRatedMm, 'mm')} rated, ${figure(reserve, '%', 0)} in reserve`,
        how: `The larger growth over ${segment.bellowsCount} joints, shared evenly; a guide that sticks shifts it to the neighbours.`,
        source: REGISTER,
      },
    )
    if (reserve < 0)
      findings.push(
        `A joint of ${segment.tag} would have to take ${figure(strokeMm, 'mm', 1)} and is rated for ${figure(segment.bellowsRatedMm, 'mm')}. Heat less.`,
      )
    else if (wanted !== undefined && reserve < wanted)
      findings.push(
        `A joint of ${segment.tag} keeps ${figure(reserve, '%', 0)} of its stroke, less than the ${figure(wanted, '%')} that this site wants.`,
      )
  }
  if (facts.length === 0)
    facts.push({
      name: 'Growth of the tube',
      value: notYet('where and how hot'),
      how: 'Expansion of the steel over the rise in temperature.',
      source: TEXTBOOK,
    })
  return {
    facts,
    findings,
    thresholds: ['stroke-reserve'],
    precautions: [
      'Take shipping brackets off, see that guides move freely and that end stops are where the drawing has them.',
      'Keep hands out of the gaps at sliding supports and put up a sign that says so. Lean no ladder on the tube.',
      'Read strokes at the temperatures agreed beforehand and compare them with the expected ones.',
      'After an unexpected bang, hold the ramp and stand clear until the cause is found.',
    ],
  }
}

export function storedEnergy({ segments }: HazardGround): HazardFinding {
  return {
    facts: segments.flatMap((segment): HazardFact[] => {
      const force = coverForce(segment.innerDiameterM)
      const volume = volumeOf(segment)
      return [
        {
          name: `Load of the air on a blank of ${segment.tag}`,
          value: `${figure(force / 1000, 'kN', 1)}, the weight of ${figure(force / GRAVITY / 1000, 't', 1)}`,
          how: `101 325 Pa × π/4 × (${figure(segment.innerDiameterM, 'm')})².`,
          source: TEXTBOOK,
        },
        {
          name: `Energy held by ${segment.tag}`,
          value: figure(evacuatedEnergy(volume) / 1e6, 'MJ', 1),
          how: `101 325 Pa × ${figure(volume, 'm³', 1)}.`,
          source: TEXTBOOK,
        },
      ]
    }),
    findings: [],
    thresholds: [],
    precautions: [
      'No blow, no grinding, no drilling on tube under vacuum; report a fresh dent and have it looked at before going on.',
      'Guard windows and ceramic feedthroughs; wear a face shield near glass.',
      'Never loosen a flange under vacuum, and load a blank only up to what it is rated for.',
    ],
  }
}

export function lifting(): HazardFinding {
  return {
    facts: [],
    findings: [],
    thresholds: [],
    precautions: [
      'Lift blankets, bars, carts and pump heads by a plan, with certified gear.',
      'Put up the load sign (ISO 7010 W015); do not stand or pass under a load.',
      'Carry nothing over a heated tube: keep the crane off this stretch.',
    ],
  }
}

export function loneWork({ content, ambientC }: HazardGround): HazardFinding {
  const { maxCelsius, rampKH, unattended } = content
  const facts: HazardFact[] = [
    {
      name: 'Ramp, with two people present',
      value:
        maxCelsius === null || rampKH === null
          ? notYet('how hot and how fast')
          : figure(Math.max(0, maxCelsius - ambientC) / rampKH, 'h', 1),
      how:
        maxCelsius === null || rampKH === null
          ? 'Rise in temperature over the rate of the ramp.'
          : `${figure(Math.max(0, maxCelsius - ambientC), 'K')} at ${figure(rampKH, 'K/h')}, stops not counted.`,
      source: THIS_PERMIT,
    },
    {
      name: 'Heating with nobody there',
      value:
        unattended === null
          ? notYet('whether')
          : unattended
            ? `yes; on call within ${content.annex.onCallMinutes === null ? 'a time not yet given' : figure(content.annex.onCallMinutes, 'min')}`
            : 'no',
      how:
        content.nightCover === '' ? 'Night cover is not written yet.' : `Night cover: ${content.nightCover}.`,
      source: THIS_PERMIT,
    },
  ]
  return {
    facts,
    findings: [],
    thresholds: ['check-in'],
    precautions: [
      'Leave nobody alone during the ramp, at first energising, at the opening of a vent, or at live parts.',
      'Whoever walks the tunnel alone says so before, calls in by radio, and says when they are out; a missed call starts a search.',
      'Hang the map of call points at each way in, and try the radio where the work is.',
      `Some tasks need a second person whatever else is arranged: confined spaces and live electrical work are the usual ones (${PRACTICE}).`,
    ],
  }
}
