/** Words and figures that several parts of the intake share. */

/** A size in the unit that fits, such as `32 KiB` or `5.4 MiB`. */
export function sizeText(bytes: number): string {
  if (bytes < 1024) return `${bytes} ${bytes === 1 ? 'byte' : 'bytes'}`
  const kib = bytes / 1024
  if (kib < 1024) return `${kib.toFixed(kib < 10 ? 1 : 0)} KiB`
  const mib = kib / 1024
  return `${mib.toFixed(mib < 10 ? 1 : 0)} MiB`
}

/** A count with thin spaces between thousands, such as `103 412`. */
export function countText(count: number): string {
  return String(count).replace(/\B(?=(\d{3})+$)/g, '\u202f')
}

/** A count with its noun. */
export function countOf(count: number, one: string, several: string): string {
  return `${countText(count)} ${count === 1 ? one : several}`
}
