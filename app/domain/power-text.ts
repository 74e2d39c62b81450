/**
 * A number as a power of ten, such as `6.81 × 10⁻⁸`, for sentences that are shown as they stand.
 *
 * @param digits significant digits
 */
export function powerText(value: number, digits = 3): string {
  if (value === 0 || !Number.isFinite(value)) return String(value)
  const [mantissa = '', exponent = ''] = value.toExponential(digits - 1).split('e')
  const raised = Array.from(String(Number(exponent)), (sign) =>
    sign === '-' ? '⁻' : ('⁰¹²³⁴⁵⁶⁷⁸⁹'[Number(sign)] ?? ''),
  )
  return `${mantissa} × 10${raised.join('')}`
}
