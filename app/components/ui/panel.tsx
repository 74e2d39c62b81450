import { useId } from 'react'

/**
 * A sheet of paper on the page, with a heading and, to its right, what belongs to the whole of it (keys of a chart,
 * filters, a download).
 *
 * @param aside what stands at the end of the heading's line
 */
export function Panel({
  title,
  aside,
  id,
  className = '',
  children,
}: {
  title: string
  aside?: React.ReactNode
  id?: string
  className?: string
  children: React.ReactNode
}) {
  const headingId = useId()
  return (
    <section
      id={id}
      aria-labelledby={headingId}
      className={`mb-4.5 min-w-0 rounded-md border bg-sheet px-4 py-3.5 print:rounded-none ${className}`}
    >
      <div className="mb-2 flex flex-wrap items-center justify-between gap-x-4 gap-y-2">
        <h2 id={headingId}>{title}</h2>
        {aside}
      </div>
      {children}
    </section>
  )
}

/** The head of a page: where it hangs, its name, a line about it, and what can be done from here. */
export function PageHead({
  title,
  children,
  crumbs,
  actions,
}: {
  title: React.ReactNode
  /** The line under the name. */
  children?: React.ReactNode
  crumbs?: React.ReactNode
  actions?: React.ReactNode
}) {
  return (
    <div className="mb-4 flex flex-wrap items-end justify-between gap-x-6 gap-y-3">
      <div className="min-w-0">
        {crumbs !== undefined && (
          <nav aria-label="Where this page hangs" className="mb-1 text-sm text-ink-3">
            {crumbs}
          </nav>
        )}
        <h1>{title}</h1>
        {children !== undefined && <div className="mt-1 text-ink-2">{children}</div>}
      </div>
      {actions !== undefined && <div className="flex flex-wrap gap-2 print:hidden">{actions}</div>}
    </div>
  )
}

/** Pairs of a name and a value, the values in line at the right edge. */
export function Facts({ items }: { items: readonly { name: string; value: React.ReactNode }[] }) {
  return (
    <dl>
      {items.map(({ name, value }) => (
        <div key={name} className="flex justify-between gap-4 py-1">
          <dt className="text-ink-2">{name}</dt>
          <dd className="text-right font-medium">{value}</dd>
        </div>
      ))}
    </dl>
  )
}
