/**
 * The sheets of a permit that are posted at the segment: what each says, as blocks that a page and a PDF are made from.
 * Paper shows how things stood when it was printed; every sheet says so.
 */
import type { HazardView } from './hazards.ts'
import { instantText } from './instant-text.ts'
import { allPrintable, type Paper, type PaperFrame, type Sheet } from './paper/blocks.ts'
import type { CurveFacts } from './paper/curve.ts'
import type { Drawing } from './paper/drawing.ts'
import { permitSheet } from './paper/permit-sheet.ts'
import {
  curveSheet,
  emergencySheet,
  isolationSheet,
  signInSheet,
  sketchSheet,
} from './paper/posted-sheets.ts'
import type { SketchFacts } from './paper/sketch.ts'
import { standingOf } from './paper/standing.ts'
import { suspendedSheet } from './paper/suspended-sheet.ts'
import type { PermitContent } from './permit-content.ts'
import type { ConflictFact } from './permit-facts.ts'
import type { PermitState, PermitTestKind } from './permit-words.ts'

export interface PaperPoint {
  tag: string
  isolates: string
  required: string
  /** Null where no lock hangs. */
  lock: { number: string; tagNumber: string; appliedBy: string; appliedAt: Date } | null
  verified: { by: string; at: Date } | null
}

export interface PaperTest {
  kind: PermitTestKind
  place: string
  /** What it has to be, in words. */
  wanted: string
  /** Null while there is no result. */
  last: {
    result: string
    passed: boolean
    instrument: string
    calibrationDue: Date | null
    by: string
    at: Date
    nextDueAt: Date | null
  } | null
  overdue: boolean
}

/** Everything that is printed. Lengths in metres, temperatures in °C. */
export interface PaperFacts {
  site: { name: string; zone: string; demo: boolean }
  number: string
  code: string
  /** What the QR code leads to, and the code itself. */
  address: string
  qr: Drawing
  printed: { at: Date; by: string }
  state: PermitState
  revision: number
  version: number
  approvedVersion: number | null
  content: PermitContent
  windowFrom: Date | null
  windowTo: Date | null
  currentUntil: Date | null
  people: {
    requestedBy: string | null
    approvedBy: string | null
    approvedAt: Date | null
    acceptedBy: string | null
    acceptedAt: Date | null
    holder: string | null
    deputies: string[]
    crew: string[]
    isolating: string | null
    /** With the licence and its end where they are known. */
    electrician: string | null
    attendant: string | null
  }
  /** What the officer added when approving. */
  terms: string
  /** The stop that is on; null where work is not stopped. */
  stopped: { at: Date; by: string; reason: string; madeSafe: string | null } | null
  points: PaperPoint[]
  tests: PaperTest[]
  hazards: HazardView[]
  conflicts: ConflictFact[]
  /** Whether the heating is on, in words and as of when. */
  heatingText: string
  /** Null where the place is not known yet. */
  sketch: SketchFacts | null
  curve: (CurveFacts & { stepText: string }) | null
}

/** Head and foot of every sheet. */
function frameOf(facts: PaperFacts): PaperFrame {
  const { site, number, revision, version, approvedVersion, printed, code, address, qr } = facts
  const { large, meaning } = standingOf({ ...facts, zone: site.zone })
  const approved =
    approvedVersion === null
      ? 'not approved'
      : approvedVersion === version
        ? 'the approved one'
        : `not approved, version ${approvedVersion} was`
  return {
    site: site.demo ? `${site.name}, demo data` : site.name,
    number,
    revisionText: `Revision ${revision}, version ${version} (${approved})`,
    printedText: `Printed ${instantText(printed.at, site.zone)} by ${printed.by}`,
    standing: large,
    standingText: meaning,
    code,
    address,
    qr,
    foot: [
      `What counts is the register as Ebbline shows it on screen. This sheet shows how things stood when it was printed and may be out of date: compare the revision before you rely on it (${address}).`,
      'Ebbline records. It does not isolate, switch off or protect.',
    ],
  }
}

/** All sheets in the order in which they are posted; a stop comes first and only while it is on. */
export function permitPaper(facts: PaperFacts): Paper {
  const sheets: (Sheet | null)[] = [
    suspendedSheet(facts),
    permitSheet(facts),
    isolationSheet(facts),
    sketchSheet(facts),
    curveSheet(facts),
    emergencySheet(facts),
    signInSheet(facts),
  ]
  return allPrintable({ frame: frameOf(facts), sheets: sheets.filter((sheet) => sheet !== null) })
}
