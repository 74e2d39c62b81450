/** What the physics throws when an argument cannot be used: which one, what it was, and what would do. */
export class PhysicsError extends Error {
  readonly argument: string
  readonly found: number
  readonly expected: string

  constructor(argument: string, found: number, expected: string) {
    super(`${argument} is ${found}; expected ${expected}`)
    this.name = 'PhysicsError'
    this.argument = argument
    this.found = found
    this.expected = expected
  }
}
