/** Cautions about heat: surfaces, fire, seals that decompose, jackets, and people in warm air. */
import { airForRise, jacketSkinK, STILL_AIR_FILM_WM2K } from '../../physics/hazards.ts'
import { celsiusToKelvin, kelvinToCelsius } from '../../physics/units.ts'
import { coolHours, powerW } from '../bake-load.ts'
import type { HazardFact, HazardFinding, HazardGround } from '../hazards.ts'
import { figure, named, notYet, PRACTICE, REGISTER, TEXTBOOK, THIS_PERMIT } from './figures.ts'

/** Warming of a bay that the figure of fresh air is worked out for, K (own choice). */
const AIR_RISE_K = 10

export function hotSurface(ground: HazardGround): HazardFinding {
  const { content, ambientC, segments } = ground
  const touch = ground.adopted['touch-limit']
  const hot = content.maxCelsius
  const facts: HazardFact[] = [
    {
      name: 'Bare steel',
      value: hot === null ? notYet('how hot') : `up to ${figure(hot, '°C')}`,
      how: 'Highest temperature of the permit: flanges, supports and wherever the jacket is open.',
      source: THIS_PERMIT,
    },
  ]
  const findings: string[] = []
  if (hot !== null) {
    for (const segment of segments) {
      const skin = kelvinToCelsius(
        jacketSkinK(
          {
            diameterM: segment.innerDiameterM,
            tubeK: celsiusToKelvin(Math.max(hot, ambientC)),
            ambientK: celsiusToKelvin(ambientC),
          },
          { thicknessM: segment.insulationM, conductivityWMK: segment.insulationWPerMK },
        ),
      )
      facts.push({
        name: `Outside of the jacket, ${segment.tag}`,
        value: `about ${figure(skin, '°C', 0)} where it is whole`,
        how: `Heat through a cylinder of ${figure(segment.insulationM * 1000, 'mm')} at ${figure(segment.insulationWPerMK, 'W/(m·K)')} on a tube of ${figure(segment.innerDiameterM, 'm')}, then through still air at ${figure(STILL_AIR_FILM_WM2K, 'W/(m²·K)')} into ${figure(ambientC, '°C')}.`,
        source: `Fourier’s law, ${TEXTBOOK}; air film ${PRACTICE}`,
      })
      if (touch !== undefined && skin > touch)
        findings.push(
          `The jacket of ${segment.tag} would be ${figure(skin, '°C', 0)} outside, above the ${figure(touch, '°C')} of free access.`,
        )
      if (touch !== undefined && touch > ambientC && hot > touch)
        facts.push(coolingFact(ground, segment, hot, touch))
    }
    findings.push(...metalPartsOver(ground, hot))
  }
  return {
    facts,
    findings,
    thresholds: ['touch-limit', 'burn-second', 'burn-minute'],
    precautions: [
      'Take every bare part for hot until a contact probe has said otherwise; polished steel deceives an infra-red thermometer.',
      'Keep jackets closed, put guards over what stays bare, and hang the hot-surface sign (ISO 7010 W017) at each way in.',
      'Wear gloves and sleeves rated for the temperature above.',
      'Hold a burn under cool running water at once and for twenty minutes, then fetch the first-aider (from memory, not verified; local first-aid rules come first).',
    ],
  }
}

function coolingFact(
  { ambientC }: HazardGround,
  segment: HazardGround['segments'][number],
  hot: number,
  touch: number,
): HazardFact {
  return {
    name: `Cooling by itself, ${segment.tag}`,
    value: `about ${figure(coolHours(segment, ambientC, hot, touch), 'h', 1)} to ${figure(touch, '°C')}`,
    how: `From ${figure(hot, '°C')} with the heating off, mean of the tube; flanges and supports take longer, so measure.`,
    source: `loss and heat capacity of the tube as for its bake plan; ${PRACTICE} for supports`,
  }
}

/** Parts without an elastomer that the register gives a lower limit than they would reach. */
function metalPartsOver({ valves, ambientC }: HazardGround, hot: number): string[] {
  return valves
    .filter(({ seal }) => !isElastomer(seal))
    .map((valve) => ({ ...valve, reachesC: reaches(valve, ambientC, hot) }))
    .filter(({ reachesC, limitC }) => reachesC > limitC)
    .map(({ tag, reachesC, limitC }) => overText(tag, reachesC, limitC))
}

function reaches({ partRiseShare }: { partRiseShare: number }, ambientC: number, hot: number): number {
  return ambientC + partRiseShare * (hot - ambientC)
}

function overText(tag: string, reachesC: number, limitC: number): string {
  return `${tag} would reach ${figure(reachesC, '°C', 0)} of ${figure(limitC, '°C')} allowed. Heat less, or take the part off.`
}

function isElastomer(seal: string): boolean {
  return /elastomer|rubber|nitrile|\b(?:FKM|FPM|FFKM|EPDM|NBR)\b/i.test(seal)
}

export function elastomer(ground: HazardGround): HazardFinding {
  const { content, ambientC, valves } = ground
  const own = ground.adopted['elastomer-limit']
  const hot = content.maxCelsius
  const parts = valves.filter(({ seal }) => isElastomer(seal))
  const findings: string[] = []
  const facts = parts.map((part): HazardFact => {
    const limitC = own === undefined ? part.limitC : Math.min(own, part.limitC)
    if (hot !== null) {
      const reachesC = reaches(part, ambientC, hot)
      if (reachesC > limitC) findings.push(overText(part.tag, reachesC, limitC))
    }
    return {
      name: part.tag,
      value:
        hot === null
          ? notYet('how hot')
          : `${figure(reaches(part, ambientC, hot), '°C', 0)} of ${figure(limitC, '°C')} allowed`,
      how: `${figure(ambientC, '°C')} plus ${part.partRiseShare} of the tube’s rise (${part.seal}); heat from one side only.`,
      source: `${REGISTER}; share of the rise ${PRACTICE}`,
    }
  })
  if (parts.length === 0) {
    facts.push({
      name: 'Elastomer seals',
      value: 'none on the valves of this stretch',
      how: 'Valves of the segments and the gates at their ends were looked through; other parts are for the requester to name.',
      source: REGISTER,
    })
  }
  return {
    facts,
    findings,
    thresholds: parts.length === 0 ? [] : ['elastomer-limit'],
    precautions: [
      'Put a thermocouple on each of these parts, and stop the heating before one of them is over its limit.',
      'After overheating or fire, touch no residue: air the bay, stay out, and take fluoro-elastomer to have given off hydrogen fluoride.',
      'Agree first-aid for hydrogen fluoride with a physician beforehand, and keep it at hand while such parts are hot.',
      'Treat burnt seals and what wiped them as hazardous waste.',
    ],
  }
}

export function fire({ content }: HazardGround): HazardFinding {
  const hot = content.maxCelsius
  return {
    facts: [
      {
        name: 'Hottest surface',
        value: hot === null ? notYet('how hot') : `up to ${figure(hot, '°C')}`,
        how: 'Highest temperature of the permit.',
        source: THIS_PERMIT,
      },
    ],
    findings: [],
    thresholds: ['combustible-free'],
    precautions: [
      'Before heating, walk the whole stretch and take away cardboard, tape, rags, oil and dust; hang cables clear of the tube.',
      'A new or wetted jacket smokes: expect it, and tell whoever watches the detectors.',
      'Have extinguishers that suit live electrical equipment, and know where they stand.',
      'Where a detector is switched off, write down who did it and when it goes on again.',
      'Keep a watch through the ramp and for an hour after every change.',
    ],
  }
}

export function insulationDust({ segments }: HazardGround): HazardFinding {
  return {
    facts: segments.map((segment) => {
      const outerM = segment.innerDiameterM + 2 * segment.insulationM
      const area = Math.PI * outerM * (segment.endM - segment.startM)
      return {
        name: `Jacket of ${segment.tag}`,
        value: `${figure(segment.insulationM * 1000, 'mm')} thick, ${figure(area, 'm²', 0)} outside`,
        how: `π × ${figure(outerM, 'm')} × ${figure(segment.endM - segment.startM, 'm')}.`,
        source: REGISTER,
      }
    }),
    findings: [],
    thresholds: [],
    precautions: [
      'Opened insulation gives off fibres that irritate: wear gloves, long sleeves, and a mask as the site prescribes.',
      'Damp the place, bag cuttings at once, and vacuum rather than sweep.',
    ],
  }
}

export function heatStress(ground: HazardGround): HazardFinding {
  const { content, ambientC, segments } = ground
  const hot = content.maxCelsius
  const facts: HazardFact[] = []
  if (hot !== null && segments.length > 0) {
    const soakW = segments.reduce((sum, segment) => sum + powerW(segment, ambientC, hot, 0).totalW, 0)
    facts.push(
      {
        name: 'Heat into the tunnel',
        value: figure(soakW / 1000, 'kW', 1),
        how: `Loss of ${named(segments)} at ${figure(hot, '°C')} with its blankets, once the ramp is over.`,
        source: `loss of the tube as for its bake plan; ${PRACTICE} for supports`,
      },
      {
        name: `Fresh air for ${AIR_RISE_K} K`,
        value: figure(airForRise(soakW, AIR_RISE_K), 'm³/s', 1),
        how: `That heat divided by 1206 J/(m³·K) of air and ${AIR_RISE_K} K: with less air the bay gets warmer than ${figure(ambientC + AIR_RISE_K, '°C')}.`,
        source: TEXTBOOK,
      },
    )
  }
  if (facts.length === 0)
    facts.push({
      name: 'Heat into the tunnel',
      value: notYet('where and how hot'),
      how: 'Loss of the tube at its highest temperature.',
      source: THIS_PERMIT,
    })
  return {
    facts,
    findings: [],
    thresholds: ['bay-air'],
    precautions: [
      'Put drinking water at the barrier, take short turns, and send out whoever feels unwell.',
      'Hang temporary lights where jackets and cables narrow the way; tie hoses and leads off the floor.',
      'Wear hearing protection beside pumps and fans that run at full speed.',
    ],
  }
}
