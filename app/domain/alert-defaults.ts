/**
 * The rule that each condition begins with. Its figures are proposals for the engineer to make their own, with a date
 * and a reason (common practice, no source, unless it says otherwise).
 */
import type { AlertRuleContent } from './alert-rules.ts'
import type { AlertCondition } from './alert-words.ts'
import { SEGMENT_STATE_CODES, type SegmentState } from './segment-states.ts'

const MINUTE = 60
const HOUR = 3600
const DAY = 86_400

function allBut(...states: SegmentState[]): SegmentState[] {
  return SEGMENT_STATE_CODES.filter((code) => !states.includes(code))
}

/** Without high vacuum there is nothing for an ionisation gauge to say. */
const NO_HIGH_VACUUM: SegmentState[] = ['not-assembled', 'vented', 'roughing', 'maintenance', 'unknown']

type Default = Omit<AlertRuleContent, 'coverage' | 'resetBy' | 'suppressedIn'> &
  Partial<Pick<AlertRuleContent, 'coverage' | 'resetBy' | 'suppressedIn'>>

function rule(content: Default): AlertRuleContent {
  return { coverage: 0.6, resetBy: [], suppressedIn: [], ...content }
}

const EVERYWHERE = {
  segments: { kind: 'segments', tags: [] as string[] },
  positions: { kind: 'positions', tags: [] as string[] },
  sources: { kind: 'sources', tags: [] as string[] },
  permits: { kind: 'permits', tags: [] as string[] },
  site: { kind: 'site', tags: [] as string[] },
} as const

/** Default rule of each condition, switched off until somebody switches it on. */
export const ALERT_DEFAULTS: Record<AlertCondition, AlertRuleContent> = {
  'pressure-above-limit': rule({
    title: 'Pressure above the operating limit',
    scope: EVERYWHERE.positions,
    figures: { limitPa: 2e-6, clearRatio: 1.5 },
    onDelayS: 5 * MINUTE,
    offDelayS: 15 * MINUTE,
    priority: 'high',
    suppressedIn: allBut('in-service'),
    why: 'Above the limit the segment cannot be used, and the line as a whole is not available.',
    whatToDo:
      'Look whether the other gauges of the segment agree. If they do, find out what was touched last, keep the gate valves shut and look for a leak or a pump that has stopped.',
    howLong: 'Within the hour: a leak that grows can reach the neighbours when a valve is opened.',
    who: 'Technician on call, then the vacuum engineer.',
  }),
  'pressure-above-target': rule({
    title: 'Pressure above target',
    scope: EVERYWHERE.positions,
    figures: { limitPa: 2e-7, clearRatio: 1.3 },
    onDelayS: HOUR,
    offDelayS: HOUR,
    priority: 'low',
    suppressedIn: allBut('in-service'),
    why: 'The segment is in use but worse than it was promised to be; it counts against the target of the month.',
    whatToDo:
      'Compare it with last week and with the neighbours, and put it on the list of the next working day.',
    howLong: 'Days. It is for the morning, not for the night.',
    who: 'Vacuum engineer.',
  }),
  'fast-rise': rule({
    title: 'Pressure rises fast',
    scope: EVERYWHERE.positions,
    figures: { ratio: 2, windowS: 10 * MINUTE, floorPa: 5e-7, clearRatio: 1.2, quietAfterS: 5 * MINUTE },
    onDelayS: MINUTE,
    offDelayS: 10 * MINUTE,
    priority: 'high',
    suppressedIn: ['not-assembled', 'vented', 'roughing', 'maintenance', 'isolated-test'],
    why: 'A pressure that doubles within minutes is a leak that opens, a pump that fails, or a valve that moved.',
    whatToDo:
      'Ask who works on the segment. If nobody does, shut the valves to its neighbours and go and look at its pumps.',
    howLong: 'Minutes to keep the neighbours clean.',
    who: 'Technician on call.',
  }),
  'slow-rise': rule({
    title: 'Pressure creeps up over days',
    scope: EVERYWHERE.positions,
    figures: { perDay: 0.2, windowS: 3 * DAY, clearPerDay: 0.05, quietAfterS: 2 * DAY },
    onDelayS: 0,
    offDelayS: 2 * DAY,
    priority: 'medium',
    suppressedIn: [...NO_HIGH_VACUUM, 'isolated-test', 'bake-prep', 'heating', 'soak', 'cooling'],
    why: 'At a fifth more each day a quiet segment reaches its limit within two weeks.',
    whatToDo:
      'See whether both gauges climb. One alone is a question about the gauge; both are a small leak or a tired pump: plan a leak hunt.',
    howLong: 'A few days.',
    who: 'Vacuum engineer.',
  }),
  'pressure-while-heating': rule({
    title: 'Pressure too high while hot',
    scope: EVERYWHERE.positions,
    figures: { holdPa: 1e-2, abortPa: 5e-2, clearRatio: 2 },
    onDelayS: MINUTE,
    offDelayS: 5 * MINUTE,
    priority: 'high',
    suppressedIn: allBut('heating', 'soak', 'cooling'),
    why: 'Hot gauges and pumps are worn out quickly by too much gas, and a leak in a hot tube oxidises it.',
    whatToDo:
      'Hold the ramp at the temperature it has reached until the pressure falls. Above the higher of the two limits think of breaking off: the engineer decides.',
    howLong: 'Half an hour for the hold; minutes above the higher limit.',
    who: 'Technician on call, and the vacuum engineer above the higher limit.',
  }),
  'no-data': rule({
    title: 'No data',
    scope: EVERYWHERE.positions,
    figures: { periods: 3, extraS: 5 * MINUTE, clearSamples: 3 },
    onDelayS: 0,
    offDelayS: 0,
    priority: 'medium',
    why: 'What is not measured is not known to be in order, and no other rule can speak for it.',
    whatToDo:
      'Look at the logger and its card, its network and its power. While a segment is hot somebody reads its temperatures by hand until the data are back.',
    howLong: 'An hour; fifteen minutes while a segment is hot.',
    who: 'Technician on call.',
  }),
  'file-missing': rule({
    title: 'Night file missing',
    scope: EVERYWHERE.sources,
    figures: { dueMinute: 480, worsenMinute: 600, lookBackDays: 7 },
    onDelayS: 0,
    offDelayS: 0,
    priority: 'low',
    why: 'Without the file nobody has looked at that night.',
    whatToDo:
      'See under Intake whether it waits there for an answer. If it does not, fetch it from the logger.',
    howLong: 'The morning.',
    who: 'Technician of the day crew.',
  }),
  'over-temperature': rule({
    title: 'Over-temperature',
    scope: EVERYWHERE.positions,
    figures: { aboveSetpointC: 10, deadbandC: 5 },
    onDelayS: 2 * MINUTE,
    offDelayS: 10 * MINUTE,
    priority: 'highest',
    resetBy: ['engineer', 'safety-officer'],
    why: 'Seals and bonnets fail above their limit, and a runaway heater does not stop by itself.',
    whatToDo:
      'Lower the setpoint or take the heating off at its supply. Nobody goes to the tube alone. Check with the neighbouring thermocouple.',
    howLong: 'Minutes.',
    who: 'Technician on call; the vacuum engineer resets it.',
  }),
  'ramp-too-fast': rule({
    title: 'Ramp too fast',
    scope: EVERYWHERE.positions,
    figures: { aboveCPerH: 2, hardCPerH: 15, windowS: 30 * MINUTE, quietAfterS: 0 },
    onDelayS: 10 * MINUTE,
    offDelayS: 10 * MINUTE,
    priority: 'high',
    suppressedIn: allBut('heating', 'soak', 'cooling'),
    why: 'Uneven growth strains bellows, flanges and feedthroughs; leaks show after cooling, when it is too late.',
    whatToDo: 'Hold the setpoint for half an hour, then go on at the planned rate.',
    howLong: 'Half an hour.',
    who: 'Technician on call.',
  }),
  spread: rule({
    title: 'Temperature spread along the tube',
    scope: EVERYWHERE.segments,
    figures: {
      spreadC: 20,
      neighbourC: 12,
      rampSpreadC: 30,
      rampNeighbourC: 18,
      rampS: 2 * HOUR,
      deadbandC: 4,
    },
    onDelayS: 10 * MINUTE,
    offDelayS: 10 * MINUTE,
    priority: 'high',
    suppressedIn: allBut('heating', 'soak'),
    why: 'A cold stretch keeps its water and gives it back after the bake; a hot one is close to a limit.',
    whatToDo:
      'Leave the setpoint where it is. Two people look for insulation that has slipped between the two thermocouples named; nobody touches the tube.',
    howLong: 'An hour or two.',
    who: 'Technician on call, with a second person.',
  }),
  'thermocouple-suspect': rule({
    title: 'Thermocouple in doubt',
    scope: EVERYWHERE.positions,
    figures: { openC: 1300, jumpC: 20, jumpHoldS: 10 * MINUTE, flatC: 0.1, movingC: 5, flatS: HOUR },
    onDelayS: 5 * MINUTE,
    offDelayS: 30 * MINUTE,
    priority: 'medium',
    suppressedIn: ['not-assembled', 'maintenance'],
    why: 'Heat that follows a wrong thermocouple goes where nobody sees it.',
    whatToDo:
      'Take control and limit to a neighbour if it is one of those points, and mark its readings as suspect. Repair it when the tube is cold.',
    howLong: 'Half an hour where the heating depends on it, otherwise the next day.',
    who: 'Technician on call.',
  }),
  'ion-current': rule({
    title: 'Ion-pump current off',
    scope: EVERYWHERE.positions,
    figures: { ratio: 3, clearRatio: 2, zeroA: 1e-9, quietAfterS: 15 * MINUTE },
    onDelayS: 10 * MINUTE,
    offDelayS: 10 * MINUTE,
    priority: 'medium',
    suppressedIn: NO_HIGH_VACUUM,
    why: 'Too much current is a leaking or dirty pump, none with the supply on is a pump that does not pump.',
    whatToDo: 'Compare with the gauge beside it; look at the high-voltage cable and the controller.',
    howLong: 'Hours: the getter goes on pumping, but not noble gases.',
    who: 'Technician of the day crew.',
  }),
  'pump-fault': rule({
    title: 'Mobile pump in trouble',
    scope: EVERYWHERE.segments,
    figures: {
      bearingC: 60,
      speedPercent: 95,
      deadbandC: 5,
      deadbandPercent: 2,
      quietAfterS: 15 * MINUTE,
    },
    onDelayS: MINUTE,
    offDelayS: 5 * MINUTE,
    priority: 'high',
    why: 'A pump that slows down lets its own gas back into the tube.',
    whatToDo: 'Shut the pump port first, then see to cooling, fan and load.',
    howLong: 'Minutes.',
    who: 'Technician on call.',
  }),
  'gauges-disagree': rule({
    title: 'Gauges of a segment disagree',
    scope: EVERYWHERE.segments,
    figures: { ratio: 3, clearRatio: 2, binS: HOUR, quietAfterS: 6 * HOUR },
    onDelayS: 6 * HOUR,
    offDelayS: 6 * HOUR,
    priority: 'low',
    suppressedIn: [...NO_HIGH_VACUUM, 'heating', 'soak', 'cooling'],
    why: 'One of them is wrong, and the one that reads low flatters the segment.',
    whatToDo: 'Ask a third gauge or an isolation test which one it is, and plan a change or a calibration.',
    howLong: 'A week.',
    who: 'Vacuum engineer.',
  }),
  'off-prediction': rule({
    title: 'Pressure leaves its forecast',
    scope: EVERYWHERE.positions,
    figures: { binS: HOUR, youngS: 6 * HOUR, quietAfterS: HOUR },
    onDelayS: 6 * HOUR,
    offDelayS: 3 * HOUR,
    priority: 'medium',
    suppressedIn: allBut('pumping', 'in-service', 'post-bake-test', 'cooling'),
    why: 'Something happens that the forecast did not know of, and the date that was promised no longer holds.',
    whatToDo: 'See whether somebody handled the segment. If nobody did: a leak, more water, or a gauge.',
    howLong: 'A day.',
    who: 'Vacuum engineer.',
  }),
  'gauge-health': rule({
    title: 'Gauge wants care',
    scope: EVERYWHERE.positions,
    figures: { filamentShare: 0.8, calibrationDays: 30, sensitivity: 1.3 },
    onDelayS: 0,
    offDelayS: 0,
    priority: 'low',
    why: 'A gauge that fails in a bake or past its calibration costs a test that has to be repeated.',
    whatToDo: 'Order a head or book a calibration, and put the change into a stop that is planned anyway.',
    howLong: 'Weeks.',
    who: 'Vacuum engineer.',
  }),
  'supply-fault': rule({
    title: 'Heating supply off plan',
    scope: EVERYWHERE.segments,
    figures: { offPlanShare: 0.05, jointShare: 0.1, deadbandShare: 0.8 },
    onDelayS: 10,
    offDelayS: MINUTE,
    priority: 'highest',
    resetBy: ['engineer', 'safety-officer'],
    why: 'An earth fault or a joint that warms up at a thousand amperes burns, and people are near it.',
    whatToDo:
      'Switch the supply off and lock it. Nobody touches tube, bars or cables before it has been proved dead.',
    howLong: 'At once.',
    who: 'Technician on call; electrician for the supply; the vacuum engineer resets it.',
  }),
  'power-above-cap': rule({
    title: 'Planned power above a cap',
    scope: EVERYWHERE.site,
    figures: { aheadS: DAY, slackKW: 0.05 },
    onDelayS: 0,
    offDelayS: 0,
    priority: 'medium',
    why: 'Above the cap a feeder trips and every bake on it stops at once.',
    whatToDo: 'Move one of the ramps, lower its rate, or wait for the night.',
    howLong: 'Until the hour that is named.',
    who: 'Vacuum engineer.',
  }),
  permit: rule({
    title: 'Permit runs out, or is not live with heat on',
    scope: EVERYWHERE.permits,
    figures: { firstS: 4 * HOUR, lastS: HOUR },
    onDelayS: 0,
    offDelayS: 0,
    priority: 'medium',
    why: 'Heat without a live permit is work that nobody has agreed to.',
    whatToDo:
      'Before it ends: have it revalidated or extended, or have the heating off and handed back. After it: have the supply switched off, and let the officer write why if it has to stay on.',
    howLong: 'Until it ends; after that at once.',
    who: 'Holder of the permit, then the safety officer.',
  }),
  'excluded-entry': rule({
    title: 'Somebody in a closed bay',
    scope: EVERYWHERE.site,
    figures: {},
    onDelayS: 0,
    offDelayS: 0,
    priority: 'highest',
    resetBy: ['safety-officer'],
    why: 'The bay is closed because what is in it can burn, shock or choke.',
    whatToDo: 'Call them out by radio or telephone. Nobody follows them in.',
    howLong: 'At once.',
    who: 'Whoever is nearest to a telephone, then the safety officer.',
  }),
  oxygen: rule({
    title: 'Oxygen outside its limits',
    scope: EVERYWHERE.site,
    // 29 CFR 1910.146(b): deficient below 19.5 %, enriched above 23.5 %.
    figures: { lowPercent: 19.5, highPercent: 23.5, releasePercent: 20, releaseS: 10 * MINUTE },
    onDelayS: 0,
    offDelayS: 0,
    priority: 'highest',
    resetBy: ['safety-officer'],
    why: 'Too little oxygen takes consciousness without a warning; too much lets clothes burn.',
    whatToDo:
      'Everybody leaves and stays out. No rescue without breathing apparatus: call the rescue service. An officer releases the stretch.',
    howLong: 'At once.',
    who: 'Everybody there; the safety officer.',
  }),
  'mail-undelivered': rule({
    title: 'Mail not delivered, or nobody on call',
    scope: EVERYWHERE.site,
    figures: { tries: 3 },
    onDelayS: 0,
    offDelayS: 0,
    priority: 'medium',
    why: 'An alert that reaches nobody is none.',
    whatToDo: 'Telephone the person. Mend the address or the mail server, or fill the hole in the roster.',
    howLong: 'An hour.',
    who: 'Administrator.',
  }),
}
