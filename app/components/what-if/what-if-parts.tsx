/** Small parts of the trial's form. */
import { useState } from 'react'
import { Button } from '#app/components/ui/button.tsx'

/** One of two, side by side. */
export function Choice<Value extends string>({
  legend,
  name,
  value,
  options,
  onChange,
}: {
  legend: string
  name: string
  value: Value
  options: readonly { value: Value; label: string }[]
  onChange: (value: Value) => void
}) {
  return (
    <fieldset className="mb-2">
      <legend className="mb-1 text-sm text-ink-2">{legend}</legend>
      <div className="flex flex-wrap gap-x-5">
        {options.map((option) => (
          <label key={option.value} className="flex min-h-8 items-center gap-2 pointer-coarse:min-h-11">
            <input
              type="radio"
              name={name}
              value={option.value}
              checked={option.value === value}
              onChange={() => onChange(option.value)}
              className="size-4.5 accent-ink"
            />
            {option.label}
          </label>
        ))}
      </div>
    </fieldset>
  )
}

/** Takes the address of a trial along. @param address path and query */
export function CopyLink({ address }: { address: string }) {
  const [said, setSaid] = useState('')
  async function copy() {
    const link = new URL(address, location.origin).href
    try {
      await navigator.clipboard.writeText(link)
      setSaid('Copied. Whoever opens it sees these numbers.')
    } catch {
      // Browsers refuse outside secure addresses, or where the person has said no; the link can still be had.
      setSaid(`The browser does not let this page copy. The link is in the address line: ${link}`)
    }
  }
  return (
    <div className="mt-3 print:hidden">
      <Button type="button" onClick={() => void copy()}>
        Copy link
      </Button>
      <p role="status" className="mt-1 text-sm break-words text-ink-2">
        {said}
      </p>
    </div>
  )
}
