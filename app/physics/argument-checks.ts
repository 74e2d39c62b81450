/** Argument checks shared by the heat, bake and analysis modules: one sentence for every refusal. */
import { PhysicsError } from './errors.ts'

/** Throws unless `value` is a number with low <= value <= high. */
export function requireWithin(argument: string, value: number, low: number, high: number): void {
  if (!(value >= low && value <= high)) throw new PhysicsError(argument, value, `${low} to ${high}`)
}

/** Throws unless `value` is finite and above zero. */
export function requirePositive(argument: string, value: number): void {
  if (!(value > 0 && Number.isFinite(value))) {
    throw new PhysicsError(argument, value, 'a finite number above 0')
  }
}

/** Throws unless `value` is a finite number. */
export function requireFinite(argument: string, value: number): void {
  if (!Number.isFinite(value)) throw new PhysicsError(argument, value, 'a finite number')
}
