/** Keeps the curve of a trial up with the hand: every change goes to the worker, and what it answers is shown. */
import { useEffect, useRef, useState } from 'react'
import type { WhatIfGround, WhatIfState } from '#app/domain/what-if.ts'
import type { WhatIfCurve, WhatIfGrade } from '#app/domain/what-if-solve.ts'
import type { WhatIfAnswer, WhatIfAsk } from './what-if-solver.ts'

interface Shown {
  /** The last curve there was, so that the picture stays while a sentence explains why there is no new one. */
  curve: WhatIfCurve | null
  refusal: string | null
  grade: WhatIfGrade
  /** Who solved it, and in how many ms. */
  by: { who: 'browser'; ms: number } | { who: 'server' }
}

/**
 * @param served what the server has solved for the first state
 * @returns what to show, and why the worker stopped when it did
 */
export function useWhatIfCurve(
  ground: WhatIfGround,
  state: WhatIfState,
  served: { curve: WhatIfCurve | null; refusal: string | null },
): Shown & { fault: string | null } {
  const [shown, setShown] = useState<Shown>({ ...served, grade: 'at-rest', by: { who: 'server' } })
  const [fault, setFault] = useState<string | null>(null)
  const workerRef = useRef<Worker | null>(null)
  const idRef = useRef(0)

  useEffect(() => {
    const worker = new Worker(new URL('./what-if-worker.ts', import.meta.url), { type: 'module' })
    let last = 0
    worker.onmessage = ({ data }: MessageEvent<WhatIfAnswer>) => {
      // Answers come in order; a coarse one for a trial already left behind still shows where the hand has been.
      if (data.id < last) return
      last = data.id
      setShown((before) =>
        data.kind === 'refused'
          ? { ...before, refusal: data.message, grade: 'at-rest' }
          : { curve: data.curve, refusal: null, grade: data.grade, by: { who: 'browser', ms: data.ms } },
      )
    }
    worker.onerror = ({ message }) => setFault(message || 'the browser would not start it')
    workerRef.current = worker
    return () => {
      worker.terminate()
      workerRef.current = null
    }
  }, [])

  useEffect(() => {
    idRef.current += 1
    const ask: WhatIfAsk = { id: idRef.current, ground, state }
    workerRef.current?.postMessage(ask)
  }, [ground, state])

  return { ...shown, fault }
}
