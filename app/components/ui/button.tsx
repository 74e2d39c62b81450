import type { ButtonHTMLAttributes } from 'react'
import { Link } from 'react-router'

type ButtonKind = 'plain' | 'primary' | 'danger'

const KINDS: Record<ButtonKind, string> = {
  plain: 'border-ink bg-sheet text-ink hover:bg-rule-2',
  primary: 'border-ink bg-ink text-sheet hover:bg-ink-2 hover:border-ink-2',
  danger: 'border-bad bg-sheet text-bad hover:bg-bad-soft',
}

function buttonClass(kind: ButtonKind, extra: string): string {
  return `inline-flex min-h-10 items-center justify-center gap-2 rounded-md border px-3.5 py-1.5 text-center font-medium pointer-coarse:min-h-11 disabled:cursor-not-allowed disabled:border-rule disabled:bg-rule-2 disabled:text-ink-2 print:hidden ${KINDS[kind]} ${extra}`
}

/** A button. Inside a form it submits unless told otherwise, as in plain HTML. */
export function Button({
  kind = 'plain',
  className = '',
  type = 'submit',
  ...rest
}: ButtonHTMLAttributes<HTMLButtonElement> & { kind?: ButtonKind }) {
  return <button {...rest} type={type} className={buttonClass(kind, className)} />
}

/** A link that looks like a button: it leads somewhere and changes nothing. */
export function ButtonLink({
  to,
  kind = 'plain',
  className = '',
  children,
  reloadDocument = false,
  download,
}: {
  to: string
  kind?: ButtonKind
  className?: string
  children: React.ReactNode
  /** For addresses that answer with a file and not with a page. */
  reloadDocument?: boolean
  download?: string
}) {
  return (
    <Link
      to={to}
      className={buttonClass(kind, className)}
      reloadDocument={reloadDocument}
      download={download}
    >
      {children}
    </Link>
  )
}
