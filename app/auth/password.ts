/**
 * Passwords, hashed with argon2id. Parameters follow the OWASP password storage cheat sheet's first argon2id choice
 * (19 MiB, two passes, one lane; from memory), above the library's floor.
 */
import argon2 from 'argon2'

export interface PasswordCost {
  memoryCost: number
  timeCost: number
  parallelism: number
}

const DEFAULT_COST: PasswordCost = { memoryCost: 19_456, timeCost: 2, parallelism: 1 }

/** Hash of a password, with its salt and parameters inside. `cost` exists for tests, which hash many. */
export function hashPassword(password: string, cost: PasswordCost = DEFAULT_COST): Promise<string> {
  return argon2.hash(password, { type: argon2.argon2id, ...cost })
}

/** Whether a password fits a hash. A hash that cannot be read is an error, not a "no". */
export function verifyPassword(hash: string, password: string): Promise<boolean> {
  return argon2.verify(hash, password)
}
