/** Two walls of a tube and a pressure that ebbs between them. */
export function BrandMark({ className = '' }: { className?: string }) {
  return (
    <svg
      viewBox="0 0 26 20"
      width="26"
      height="20"
      fill="none"
      aria-hidden="true"
      className={`shrink-0 ${className}`}
    >
      <path d="M1 2h24M1 18h24" stroke="currentColor" strokeWidth="2" />
      <path d="M1 5c7 0 8 9.2 24 9.8" className="stroke-vac" strokeWidth="2.6" />
    </svg>
  )
}
