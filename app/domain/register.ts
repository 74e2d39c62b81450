/** Words of the register that the database, the forms and the pages share. */
import { z } from 'zod'

export const HYDROGEN_MODELS = ['diffusion', 'low-hydrogen'] as const

export const VALVE_KINDS = ['gate', 'pump-port', 'vent'] as const
export type ValveKind = (typeof VALVE_KINDS)[number]
export const VALVE_KIND_LABELS: Record<ValveKind, string> = {
  gate: 'Gate valve',
  'pump-port': 'Pump-port valve',
  vent: 'Vent valve',
}

export const PUMP_KINDS = ['getter-ion', 'turbomolecular-cart', 'roughing-set'] as const
export type PumpKind = (typeof PUMP_KINDS)[number]
export const PUMP_KIND_LABELS: Record<PumpKind, string> = {
  'getter-ion': 'Getter and ion pump',
  'turbomolecular-cart': 'Turbomolecular cart',
  'roughing-set': 'Roughing set',
}

/** Gases a speed can be given for. Speeds are m³/s at the tube. */
export const PUMPED_GASES = ['H2', 'H2O', 'N2', 'CO', 'CO2', 'Ar', 'He', 'CH4', 'O2'] as const
export type PumpedGas = (typeof PUMPED_GASES)[number]
export const PumpSpeedsSchema = z.partialRecord(z.enum(PUMPED_GASES), z.number().nonnegative())
export type PumpSpeeds = z.infer<typeof PumpSpeedsSchema>

export const INSTRUMENT_KINDS = [
  'hot-cathode',
  'cold-cathode',
  'thermal-conductivity',
  'capacitance',
  'spinning-rotor',
  'gas-analyser',
  'thermocouple',
  'supply-meter',
  'energy-meter',
  'pump-controller',
  'oxygen-monitor',
  'hand-meter',
] as const
export type InstrumentKind = (typeof INSTRUMENT_KINDS)[number]

export const POSITION_KINDS = [
  'hot-cathode',
  'cold-cathode',
  'thermal-conductivity',
  'thermocouple',
  'bellows-scale',
  'supply-volts',
  'supply-amps',
  'energy-meter',
  'ion-pump-current',
  'bay-fan',
  'partial-pressure',
  'oxygen',
  'tube-ends',
] as const
export type PositionKind = (typeof POSITION_KINDS)[number]
export const POSITION_KIND_LABELS: Record<PositionKind, string> = {
  'hot-cathode': 'Hot cathode',
  'cold-cathode': 'Cold cathode',
  'thermal-conductivity': 'Thermal conductivity',
  thermocouple: 'Thermocouple',
  'bellows-scale': 'Bellows scale',
  'supply-volts': 'Supply volts',
  'supply-amps': 'Supply amps',
  'energy-meter': 'Energy meter',
  'ion-pump-current': 'Ion-pump current',
  'bay-fan': 'Bay fan',
  'partial-pressure': 'Residual gas',
  oxygen: 'Oxygen monitor',
  'tube-ends': 'Tube end to end',
}

export const HEATER_KINDS = ['direct-current', 'blanket'] as const
export type HeaterKind = (typeof HEATER_KINDS)[number]
export const HEATER_KIND_LABELS: Record<HeaterKind, string> = {
  'direct-current': 'Tube under direct current',
  blanket: 'Blanket heater',
}

/** Cables that feed bakes; each has a limit of its own (limit kinds feeder-west and feeder-east). */
export const FEEDERS = ['west', 'east'] as const
export type Feeder = (typeof FEEDERS)[number]

export const LIMIT_KINDS = [
  'target',
  'operating-limit',
  'air-leak',
  'isolation-rise',
  'bake-temperature',
  'bake-tolerance',
  'bake-hours',
  'ramp-rate',
  'temperature-spread',
  'bake-hold-pressure',
  'bake-abort-pressure',
  'touch-limit',
  'exclusion-length',
  'exclusion-temperature',
  'power-cap-day',
  'power-cap-night',
  'power-base',
  'feeder-west',
  'feeder-east',
  'oxygen-low',
  'oxygen-high',
  'oxygen-release',
  'available-at-target',
] as const
export type LimitKind = (typeof LIMIT_KINDS)[number]
export const LIMIT_KIND_FACTS: Record<LimitKind, { label: string; unit: string }> = {
  target: { label: 'Target in service', unit: 'Pa' },
  'operating-limit': { label: 'Operating limit', unit: 'Pa' },
  'air-leak': { label: 'Air leak accepted per segment', unit: 'Pa·m³/s' },
  'isolation-rise': { label: 'Isolation test after bake, rise', unit: 'Pa/h' },
  'bake-temperature': { label: 'Bake temperature', unit: '°C' },
  'bake-tolerance': { label: 'Bake temperature tolerance', unit: '°C' },
  'bake-hours': { label: 'Soak length', unit: 'h' },
  'ramp-rate': { label: 'Ramp rate', unit: '°C/h' },
  'temperature-spread': { label: 'Spread along the tube', unit: '°C' },
  'bake-hold-pressure': { label: 'Hold the ramp above', unit: 'Pa' },
  'bake-abort-pressure': { label: 'Abort advice above', unit: 'Pa' },
  'touch-limit': { label: 'Free access below, hottest point', unit: '°C' },
  'exclusion-length': { label: 'Exclusion along the tunnel', unit: 'm' },
  'exclusion-temperature': { label: 'Exclusion applies above', unit: '°C' },
  'power-cap-day': { label: 'Power cap for bakes, 06:00 to 22:00', unit: 'kW' },
  'power-cap-night': { label: 'Power cap for bakes, 22:00 to 06:00', unit: 'kW' },
  'power-base': { label: 'Base load inside the cap', unit: 'kW' },
  'feeder-west': { label: 'Feeder west', unit: 'kW' },
  'feeder-east': { label: 'Feeder east', unit: 'kW' },
  'oxygen-low': { label: 'Oxygen, lower limit', unit: '%' },
  'oxygen-high': { label: 'Oxygen, upper limit', unit: '%' },
  'oxygen-release': { label: 'Oxygen for free release', unit: '%' },
  'available-at-target': { label: 'Segments at target for "available"', unit: 'segments' },
}

/** Case, spaces and dashes do not tell two channels apart. */
export function channelKey(name: string): string {
  return name.toUpperCase().replace(/[\s\-_‐-―−]+/g, '')
}
