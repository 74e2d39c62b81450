/**
 * The life of a permit told a second time, from the words of the trade and not from the product's table: one object
 * that lives, with plain questions to it. Tests hold the product against it. Times are hours since the walk began.
 */

export type Situation =
  | 'draft'
  | 'requested'
  | 'returned'
  | 'refused'
  | 'approved'
  | 'issued'
  | 'suspended'
  | 'expired'
  | 'handed-back'
  | 'cancelled'
  | 'lapsed'
  | 'withdrawn'
  | 'discarded'

export interface Person {
  id: number
  drafts: boolean
  /** Hour at which a second person confirmed the officer's role; null for everybody else. */
  officerSince: number | null
}

/** What the form says, as far as the life cycle asks. */
export interface Terms {
  from: number
  to: number
  holder: number
  deputies: number[]
  /** Everything else is filled in. */
  whole: boolean
  /** Heating goes on unattended, with alarms, on-call time and shut-off named. */
  annex: boolean
}

export interface LockedPoint {
  lock: string | null
  by: number | null
  verifiedBy: number | null
}

/** Things around the permit that people change without the permit's doing. */
export interface Surroundings {
  points: LockedPoint[]
  /** Oxygen, due again each 12 h, and the cut-out, tested once: when, and whether it was good. */
  oxygen: { at: number; good: boolean } | null
  cutOut: { at: number; good: boolean } | null
  heating: boolean | null
  blocked: boolean
  ruling: 'none needed' | 'open' | 'allowed' | 'denied' | 'outdated'
  thresholdsSet: boolean
  mayExtend: boolean
}

export interface Said {
  reason: boolean
  onSite: boolean
  barriers: boolean
  signs: boolean
  outgoing: number
  hours: number
  locksOff: boolean
  terms: Terms
}

const OXYGEN_HOURS = 12

export class PermitModel {
  situation: Situation = 'draft'
  terms: Terms
  windowFrom: number
  windowTo: number
  validUntil: number | null = null
  holder: number | null = null
  timesExtended = 0
  hoursExtended = 0
  begun: number | null = null
  ranOut = false
  private stoppedAt: number | null = null
  private approvedAt: number | null = null
  private checks: { at: number; good: boolean }[] = []
  /** Everybody who ever wrote on it or asked for it, approved it, held it. */
  private readonly writers = new Set<number>()
  private readonly approvers = new Set<number>()
  private readonly holders = new Set<number>()
  /** Holder and deputies of the terms that were approved last, also while others wait. */
  private namedAtApproval = new Set<number>()

  constructor(
    author: number,
    terms: Terms,
    private readonly planner: number,
    private readonly around: Surroundings,
  ) {
    this.terms = terms
    this.windowFrom = terms.from
    this.windowTo = terms.to
    this.writers.add(author)
  }

  /** Lets time do what it does by itself. */
  becomes(now: number): void {
    if (this.situation === 'approved' && now >= this.windowFrom + 2) {
      if (this.begun === null) this.situation = 'lapsed'
      else this.runOut()
    }
    const live = this.situation === 'issued' || this.situation === 'suspended'
    if (live && now >= Math.min(this.validUntil ?? this.windowTo, this.windowTo)) this.runOut()
  }

  private runOut(): void {
    this.situation = 'expired'
    this.ranOut = true
  }

  /** Tries something; whether it is done. */
  attempt(act: string, who: Person, now: number, said: Said): boolean {
    this.becomes(now)
    const officer = who.officerSince !== null && now - who.officerSince >= 24
    const { around, situation } = this
    switch (act) {
      case 'edit':
        return this.when(who.drafts && (situation === 'draft' || situation === 'returned'), () => {
          this.writers.add(who.id)
          this.take(said.terms)
        })
      case 'request':
        return this.when(
          who.drafts && ['draft', 'returned'].includes(situation) && this.canBeAskedFor(this.terms, now),
          () => {
            this.writers.add(who.id)
            this.situation = 'requested'
          },
        )
      case 'return':
        return this.when(officer && situation === 'requested' && said.reason, () => {
          this.situation = 'returned'
        })
      case 'refuse':
        return this.when(
          officer && situation === 'requested' && said.reason && this.begun === null && this.hanging() === 0,
          () => {
            this.situation = 'refused'
          },
        )
      case 'approve':
        return this.when(
          officer &&
            situation === 'requested' &&
            !this.hasPart(who.id) &&
            this.canBeAskedFor(this.terms, now) &&
            this.officersHaveDecided(),
          () => {
            this.approvers.add(who.id)
            this.approvedAt = now
            this.namedAtApproval = new Set([this.terms.holder, ...this.terms.deputies])
            this.situation = 'approved'
          },
        )
      case 'change-terms': {
        const stopped = situation === 'suspended' && around.heating === false
        const can = who.drafts && said.reason && !this.ranOut && (situation === 'approved' || stopped)
        return this.when(can && this.canBeAskedFor(said.terms, now), () => {
          this.writers.add(who.id)
          this.take(said.terms)
          this.validUntil = null
          this.situation = 'requested'
        })
      }
      case 'withdraw':
        return this.when(
          (who.drafts || officer) &&
            ['requested', 'returned', 'approved'].includes(situation) &&
            said.reason &&
            this.begun === null &&
            this.hanging() === 0,
          () => {
            this.situation = 'withdrawn'
          },
        )
      case 'discard':
        return this.when(who.drafts && situation === 'draft', () => {
          this.situation = 'discarded'
        })
      case 'site-check':
        return this.when(
          (who.drafts || officer) && ['approved', 'issued', 'suspended'].includes(situation),
          () => {
            this.checks.push({ at: now, good: said.barriers && said.signs })
          },
        )
      case 'accept':
        return this.when(
          situation === 'approved' &&
            this.isNamed(who.id) &&
            !this.approvers.has(who.id) &&
            said.onSite &&
            now >= this.windowFrom &&
            now < this.windowTo &&
            this.checkedSince(this.approvedAt) &&
            this.isIsolated() &&
            this.isTested(now, null) &&
            !around.blocked,
          () => {
            this.situation = 'issued'
            this.begun ??= now
            this.hold(who.id)
            this.validUntil = this.untilFrom(now)
          },
        )
      case 'hand-over':
        return this.when(
          (situation === 'issued' || situation === 'suspended') &&
            this.isNamed(who.id) &&
            !this.approvers.has(who.id) &&
            this.holder !== who.id &&
            said.outgoing === this.holder,
          () => this.hold(who.id),
        )
      case 'revalidate': {
        const until = this.untilFrom(now)
        return this.when(
          situation === 'issued' &&
            this.isNamed(who.id) &&
            !this.approvers.has(who.id) &&
            said.onSite &&
            this.isTested(now, null) &&
            this.isIsolated() &&
            until > (this.validUntil ?? Number.POSITIVE_INFINITY),
          () => {
            this.validUntil = until
          },
        )
      }
      case 'extend':
        return this.when(
          officer &&
            situation === 'issued' &&
            said.reason &&
            !this.hasPart(who.id) &&
            around.mayExtend &&
            this.timesExtended < 2 &&
            said.hours > 0 &&
            this.hoursExtended + said.hours <= 72 &&
            this.officersHaveDecided(),
          () => {
            this.timesExtended += 1
            this.hoursExtended += said.hours
            this.windowTo += said.hours
          },
        )
      case 'suspend':
        return this.when(situation === 'issued' && said.reason, () => {
          this.situation = 'suspended'
          this.stoppedAt = now
        })
      case 'made-safe':
        return (who.drafts || officer) && (situation === 'suspended' || situation === 'expired')
      case 'resume':
        return this.when(
          officer &&
            situation === 'suspended' &&
            said.reason &&
            !this.holders.has(who.id) &&
            !this.ranOut &&
            this.validUntil !== null &&
            this.checkedSince(this.stoppedAt) &&
            this.isTested(now, this.stoppedAt) &&
            this.isIsolated(),
          () => {
            this.situation = 'issued'
          },
        )
      case 'hand-back': {
        const working = ['issued', 'suspended', 'expired'].includes(situation)
        const interrupted = this.begun !== null && ['requested', 'returned', 'approved'].includes(situation)
        const deputyForAbsent = situation === 'expired' && this.isNamed(who.id) && !this.approvers.has(who.id)
        return this.when(
          (working || interrupted) &&
            (this.holder === who.id || deputyForAbsent) &&
            around.heating !== true &&
            (!said.locksOff || this.hanging() === 0),
          () => {
            this.holders.add(who.id)
            this.situation = 'handed-back'
          },
        )
      }
      case 'return-to-holder':
        return this.when(
          officer && situation === 'handed-back' && said.reason && !this.holders.has(who.id),
          () => {
            this.situation = 'suspended'
            this.stoppedAt = now
          },
        )
      case 'cancel':
        return this.when(
          officer &&
            situation === 'handed-back' &&
            !this.holders.has(who.id) &&
            this.hanging() === 0 &&
            around.heating !== true,
          () => {
            this.situation = 'cancelled'
          },
        )
      default:
        throw new Error(`The model knows no ${act}`)
    }
  }

  private when(can: boolean, then: () => void): boolean {
    if (can) then()
    return can
  }

  private take(terms: Terms): void {
    this.terms = terms
    this.windowFrom = terms.from
    this.windowTo = terms.to
  }

  private hold(id: number): void {
    this.holder = id
    this.holders.add(id)
  }

  /** Named in the terms that an officer approved, not in others that wait. */
  private isNamed(id: number): boolean {
    return this.namedAtApproval.has(id)
  }

  private hasPart(id: number): boolean {
    return (
      this.writers.has(id) ||
      this.planner === id ||
      this.terms.holder === id ||
      this.terms.deputies.includes(id) ||
      this.isNamed(id) ||
      this.holders.has(id) ||
      this.around.points.some(({ verifiedBy }) => verifiedBy === id)
    )
  }

  private canBeAskedFor(terms: Terms, now: number): boolean {
    const length = terms.to - terms.from
    const inTotal = this.begun === null ? 0 : terms.to - this.begun
    return (
      terms.whole &&
      length > 0 &&
      length <= 240 &&
      now < terms.from + 2 &&
      now < terms.to &&
      inTotal <= 240 + this.hoursExtended
    )
  }

  private officersHaveDecided(): boolean {
    const { blocked, ruling, thresholdsSet } = this.around
    return !blocked && thresholdsSet && (ruling === 'none needed' || ruling === 'allowed')
  }

  private checkedSince(at: number | null): boolean {
    const last = this.checks.filter((each) => at === null || each.at >= at).at(-1)
    return last?.good === true
  }

  private isIsolated(): boolean {
    return this.around.points.every(
      ({ lock, by, verifiedBy }) =>
        lock !== null &&
        by !== null &&
        verifiedBy !== null &&
        by !== verifiedBy &&
        !this.approvers.has(verifiedBy),
    )
  }

  private isTested(now: number, since: number | null): boolean {
    const { oxygen, cutOut } = this.around
    const air =
      oxygen?.good === true && now < oxygen.at + OXYGEN_HOURS && (since === null || oxygen.at >= since)
    return air && cutOut?.good === true
  }

  private untilFrom(now: number): number {
    return Math.min(now + (this.terms.annex ? 24 : 12), this.windowTo)
  }

  hanging(): number {
    return this.around.points.filter(({ lock }) => lock !== null).length
  }
}
