/** Stretches of tunnel, and how far they lie apart where a spur leaves a line. Metres of chainage. */

export interface Stretch {
  /** Code of the line. */
  line: string
  fromM: number
  toM: number
}

/** Where a spur begins on another line; its own chainage counts from there. */
export interface Joint {
  spur: string
  line: string
  atM: number
}

/** Whether two stretches share more than a point: those that only touch do not. */
export function overlaps(a: Stretch, b: Stretch): boolean {
  return a.line === b.line && a.fromM < b.toM && a.toM > b.fromM
}

/** What two stretches share; null where that is nothing or only a point. */
export function shared(a: Stretch, b: Stretch): Stretch | null {
  if (!overlaps(a, b)) return null
  return { line: a.line, fromM: Math.max(a.fromM, b.fromM), toM: Math.min(a.toM, b.toM) }
}

/** Metres along one line from a point to a stretch; 0 inside it. */
function toStretch(atM: number, { fromM, toM }: Stretch): number {
  return Math.max(0, fromM - atM, atM - toM)
}

/** Metres along the tunnel between two stretches, past joints as well; Infinity where no tunnel joins them. */
export function metresBetween(a: Stretch, b: Stretch, joints: readonly Joint[]): number {
  if (a.line === b.line) return Math.max(0, b.fromM - a.toM, a.fromM - b.toM)
  let shortest = Number.POSITIVE_INFINITY
  for (const { spur, line, atM } of joints) {
    if (a.line === spur && b.line === line) shortest = Math.min(shortest, a.fromM + toStretch(atM, b))
    if (b.line === spur && a.line === line) shortest = Math.min(shortest, b.fromM + toStretch(atM, a))
    // Two spurs of one line.
    const other = joints.find((one) => one.line === line && one.spur !== spur)
    if (other !== undefined && a.line === spur && b.line === other.spur) {
      shortest = Math.min(shortest, a.fromM + Math.abs(atM - other.atM) + b.fromM)
    }
  }
  return shortest
}

/**
 * The tunnel within so many metres of a stretch, the stretch included; on a spur or on the line that it leaves as well
 * where a joint lies within reach. Chainage below 0 is cut off.
 */
export function zonesAround(
  stretch: Stretch,
  reach: { westM: number; eastM: number },
  joints: readonly Joint[],
): Stretch[] {
  const { line, fromM, toM } = stretch
  const zones: Stretch[] = [{ line, fromM: Math.max(0, fromM - reach.westM), toM: toM + reach.eastM }]
  for (const joint of joints) {
    if (joint.line === line) {
      const side =
        joint.atM < fromM ? reach.westM : joint.atM > toM ? reach.eastM : Math.max(reach.westM, reach.eastM)
      const left = side - toStretch(joint.atM, stretch)
      if (left > 0) zones.push({ line: joint.spur, fromM: 0, toM: left })
    }
    if (joint.spur === line) {
      const left = reach.westM - fromM
      if (left > 0)
        zones.push({ line: joint.line, fromM: Math.max(0, joint.atM - left), toM: joint.atM + left })
    }
  }
  return zones
}
