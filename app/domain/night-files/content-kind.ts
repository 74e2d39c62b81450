import type { Refusal, RefusalCode } from './types.ts'

function startsWith(bytes: Uint8Array, ...signature: number[]): boolean {
  return signature.every((byte, i) => bytes[i] === byte)
}

function containsText(bytes: Uint8Array, text: string): boolean {
  const head = new TextDecoder('windows-1252').decode(bytes.subarray(0, 65536))
  return head.includes(text)
}

function refusal(code: RefusalCode, found: string, expected: string, mend: string): Refusal {
  return { code, line: null, column: null, found, expected, mend }
}

const EXPECTED = 'a text file with one row per time, or one row per time and channel'

/**
 * Refuses by content, never by name, what is no text: archives, spreadsheet files, pictures, programs.
 * Signatures are the published magic numbers of the formats (from memory). Returns null for what may be text.
 */
export function refuseBinary(head: Uint8Array, encoding: string): Refusal | null {
  if (startsWith(head, 0x50, 0x4b, 0x03, 0x04) || startsWith(head, 0x50, 0x4b, 0x05, 0x06)) {
    if (
      containsText(head, 'xl/') ||
      containsText(head, '[Content_Types].xml') ||
      containsText(head, 'opendocument')
    )
      return refusal(
        'spreadsheet-file',
        'a spreadsheet file, whatever its name says',
        EXPECTED,
        'Open it in the spreadsheet program and save the sheet as CSV text, or better send the logger’s own file.',
      )
    return refusal('archive', 'a zip archive', EXPECTED, 'Unpack it and send the files inside one by one.')
  }
  if (startsWith(head, 0xd0, 0xcf, 0x11, 0xe0))
    return refusal(
      'spreadsheet-file',
      'an older office file, probably a spreadsheet',
      EXPECTED,
      'Save the sheet as CSV text, or better send the logger’s own file.',
    )
  const archives: [string, number[]][] = [
    ['a gzip archive', [0x1f, 0x8b]],
    ['a 7z archive', [0x37, 0x7a, 0xbc, 0xaf]],
    ['a rar archive', [0x52, 0x61, 0x72, 0x21]],
    ['a bzip2 archive', [0x42, 0x5a, 0x68, 0x39]],
    ['an xz archive', [0xfd, 0x37, 0x7a, 0x58]],
  ]
  for (const [name, signature] of archives)
    if (startsWith(head, ...signature))
      return refusal('archive', name, EXPECTED, 'Unpack it and send the files inside one by one.')
  const binaries: [string, number[]][] = [
    ['a PDF document', [0x25, 0x50, 0x44, 0x46]],
    ['a PNG picture', [0x89, 0x50, 0x4e, 0x47]],
    ['a JPEG picture', [0xff, 0xd8, 0xff]],
    ['a program file', [0x7f, 0x45, 0x4c, 0x46]],
  ]
  for (const [name, signature] of binaries)
    if (startsWith(head, ...signature))
      return refusal('binary-file', name, EXPECTED, 'Choose the log file itself and send that.')
  if (encoding === 'utf-16le' || encoding === 'utf-16be') return null
  const sample = head.subarray(0, 4096)
  let odd = 0
  for (const byte of sample) if (byte < 9 || (byte > 13 && byte < 32) || byte === 127) odd += 1
  if (sample.length > 0 && odd > 0.3 * sample.length)
    return refusal(
      'binary-file',
      `bytes that are no text (${odd} of the first ${sample.length} are control characters)`,
      EXPECTED,
      'Check that the right file was chosen; a file damaged in transfer has to be fetched again from the logger.',
    )
  return null
}

/** Refuses text that is plainly no log: web pages (a sign-in page saved under the log's name) and JSON. */
export function refuseMarkup(headText: string): Refusal | null {
  const start = headText.trimStart().slice(0, 4000)
  if (/^<(?:!doctype|html|head|body|script|\?xml|svg)\b/i.test(start) || /<html[\s>]/i.test(start)) {
    const signIn = /<form\b|type=["']?password/i.test(headText.slice(0, 200_000))
    return {
      code: 'not-a-log',
      line: 1,
      column: 1,
      found: signIn ? 'a web page with a form, probably a sign-in page saved as a file' : 'a web page',
      expected: EXPECTED,
      mend: 'Sign in where the file comes from and download it again; this counts as no data received.',
    }
  }
  if (/^[{[]\s*["{[\]}]/.test(start))
    return {
      code: 'not-a-log',
      line: 1,
      column: 1,
      found: 'JSON text',
      expected: EXPECTED,
      mend: 'Send readings in JSON through the API; as a file, export them as CSV text.',
    }
  return null
}
