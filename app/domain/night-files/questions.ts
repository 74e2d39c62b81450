import { QUALITIES, type Quality } from '../readings.ts'
import { MAX_QUESTIONS } from './limits.ts'
import type { Answer, Candidate, Choice, Question } from './types.ts'
import type { WordMeaning } from './words.ts'

export function choice(value: string, label: string, candidates: Candidate[] = []): Choice {
  return { value, label, candidates }
}

type Draft = Pick<Question, 'id' | 'kind' | 'text' | 'found' | 'expected' | 'mend'> & Partial<Question>

/** A question with its defaults filled in: blocking, nothing waiting yet. */
export function question(draft: Draft): Question {
  return {
    code: draft.kind,
    blocking: true,
    choices: [],
    waiting: 0,
    line: null,
    column: null,
    ...draft,
  }
}

/** The questions of one reading, each asked once, with the answers that came with this file. */
export class QuestionList {
  readonly #asked = new Map<string, Question>()
  readonly #answers: Map<string, string>
  #blocked = false

  constructor(answers: readonly Answer[]) {
    this.#answers = new Map(answers.map((answer) => [answer.id, answer.choice]))
  }

  answer(id: string): string | null {
    return this.#answers.get(id) ?? null
  }

  /** Asks unless already asked; counts what waits for the answer. */
  ask(id: string, make: () => Question, waiting = 1): void {
    let asked = this.#asked.get(id)
    if (asked === undefined) {
      if (this.#asked.size >= MAX_QUESTIONS) return
      asked = make()
      this.#asked.set(id, asked)
      if (asked.blocking) this.#blocked = true
    }
    asked.waiting += waiting
  }

  isAsked(id: string): boolean {
    return this.#asked.has(id)
  }

  /** Whether a question stands open without whose answer no value or time is sure. */
  isBlocked(): boolean {
    return this.#blocked
  }

  /** Meanings of words that came as answers. */
  words(): Record<string, WordMeaning> {
    const words: Record<string, WordMeaning> = {}
    for (const [id, choice] of this.#answers) {
      const quality = [...QUALITIES, 'ok' as const, 'on' as const].find((known) => known === choice)
      if (id.startsWith('unknown-word:') && quality !== undefined)
        words[id.slice('unknown-word:'.length)] = quality
    }
    return words
  }

  /** Whether anything waits for an answer. */
  isWaiting(): boolean {
    for (const { waiting } of this.#asked.values()) if (waiting > 0) return true
    return false
  }

  /** Makes every open question block: nothing of the file can be read before one is answered. */
  blockAll(): void {
    for (const asked of this.#asked.values()) asked.blocking = true
    this.#blocked = true
  }

  /** Answers to questions whose id begins so, with the rest of the id. */
  answersTo(prefix: string): { rest: string; choice: string }[] {
    return Array.from(this.#answers).flatMap(([id, choice]) =>
      id.startsWith(prefix) ? [{ rest: id.slice(prefix.length), choice }] : [],
    )
  }

  /** Numbers that a person said are no measured values. */
  floors(): { value: number; quality: Quality }[] {
    return this.answersTo('floor:').flatMap(({ choice }) => floorOf(choice) ?? [])
  }

  list(): Question[] {
    return Array.from(this.#asked.values())
  }
}

const FLOOR = 'under-range:'

/** The answer that a number in a file is its lowest figure and no measured value. */
export function floorChoice(value: number): string {
  return `${FLOOR}${value}`
}

/** The number of such an answer as a sentinel; null for another answer. */
export function floorOf(choice: string): { value: number; quality: Quality } | null {
  if (!choice.startsWith(FLOOR)) return null
  const value = Number(choice.slice(FLOOR.length))
  return Number.isFinite(value) ? { value, quality: 'under-range' } : null
}
