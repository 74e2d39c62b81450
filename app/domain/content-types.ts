/** What a kept file is, told by its first bytes. Its name and what the browser says about it decide nothing. */

export const CONTENT_TYPES = {
  'image/png': 'PNG picture',
  'image/jpeg': 'JPEG picture',
  'image/webp': 'WebP picture',
  'application/pdf': 'PDF document',
  'text/plain': 'text file',
} as const
export type ContentType = keyof typeof CONTENT_TYPES

/**
 * First bytes of each format. PNG: W3C PNG specification, section 5.2. PDF: ISO 32000-1, 7.5.2. JPEG: the SOI marker
 * and the start of the next one, ITU-T T.81 annex B. All three from memory, not verified.
 */
const SIGNATURES: readonly (readonly [ContentType, readonly number[]])[] = [
  ['image/png', [0x89, 0x50, 0x4e, 0x47, 0x0d, 0x0a, 0x1a, 0x0a]],
  ['image/jpeg', [0xff, 0xd8, 0xff]],
  ['application/pdf', [0x25, 0x50, 0x44, 0x46, 0x2d]],
]

function hasAt(bytes: Uint8Array, offset: number, signature: readonly number[]): boolean {
  return signature.every((byte, i) => bytes[offset + i] === byte)
}

function ascii(text: string): number[] {
  return [...text].map((letter) => letter.charCodeAt(0))
}

/** WebP: a RIFF container that says WEBP after its length (Google's WebP container specification; from memory, not verified). */
function isWebp(head: Uint8Array): boolean {
  return hasAt(head, 0, ascii('RIFF')) && hasAt(head, 8, ascii('WEBP'))
}

/** Text in UTF-8, in UTF-16 with its mark, or in a one-byte code page: no control bytes but tab, line ends and form feed. */
function isText(head: Uint8Array): boolean {
  if (hasAt(head, 0, [0xff, 0xfe]) || hasAt(head, 0, [0xfe, 0xff])) return head.length % 2 === 0
  const sample = head.subarray(0, 65_536)
  return sample.every((byte) => (byte >= 0x20 && byte !== 0x7f) || (byte >= 0x09 && byte <= 0x0d))
}

/** The type that the first bytes of a file show (give at least 64 KiB where there are so many); null when none of ours. */
export function contentTypeOf(head: Uint8Array): ContentType | null {
  const signed = SIGNATURES.find(([, signature]) => hasAt(head, 0, signature))
  if (signed !== undefined) return signed[0]
  if (isWebp(head)) return 'image/webp'
  return head.length > 0 && isText(head) ? 'text/plain' : null
}

/** A file's own name, fit to be shown and sent in a header: no folders, no control characters, at most 255 characters. */
export function cleanFileName(given: string): string {
  const own = given.split(/[\\/]/).at(-1) ?? ''
  const shown = [...own]
    .filter((letter) => !/[\p{Cc}\p{Cf}\p{Zl}\p{Zp}]/u.test(letter))
    .join('')
    .trim()
  if (shown === '' || shown === '.' || shown === '..') return 'unnamed'
  const letters = [...shown]
  if (letters.length <= 255) return shown
  // Keep the ending, by which people tell files apart.
  return `${letters.slice(0, 240).join('')}…${letters.slice(-14).join('')}`
}
