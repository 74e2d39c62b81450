import { unitOf } from './units.ts'

/** Lines that are no rows: directives, notes, footers. */

const FOOTER =
  /^"?\s*(?:end of (?:log|file|data)|ende(?: der (?:aufzeichnung|daten))?|eof|fin(?: du fichier)?|max(?:imum|imal)?|min(?:imum|imal)?|mean|avg|average|mittel(?:wert)?|median|sum(?:me)?|total|gesamt|count|anzahl|std(?:ev)?|moyenne|rows?|zeilen)\b\.?/i

/** Separator named by a first line `sep=;`, or null. */
export function directiveSeparator(line: string): string | null {
  const match = /^"?sep=(.|\\t)"?\s*$/i.exec(line)
  if (match === null) return null
  return match[1] === '\\t' ? '\t' : (match[1] as string)
}

/** Comment lines: `#`, `//`, `%`, and `;` where the semicolon does not separate fields. */
export function isComment(line: string, separator: string | null): boolean {
  const start = /^[\s"]*/.exec(line)?.[0].length ?? 0
  const code = line.charCodeAt(start)
  if (code === 35 || code === 37) return true
  if (code === 47) return line.charCodeAt(start + 1) === 47
  return code === 59 && separator !== null && separator !== ';'
}

export function isFooter(line: string): boolean {
  return FOOTER.test(line)
}

export interface NoteFacts {
  unit: string | null
  /** Text of a start time. */
  start: string | null
  zone: string | null
  /** Text of a date that stands alone. */
  date: string | null
}

/** Facts that metadata lines may carry. Only plainly labelled ones are taken. */
export function readNote(line: string): NoteFacts {
  const unit =
    /\b(?:units?|einheit(?:en)?|unit[ée]s?|unidad)\s*[:=]\s*"?([^\s;,"|]+)/i.exec(line)?.[1] ??
    bracketUnit(line) ??
    inUnit(line)
  const start =
    /\b(?:start(?:ed|zeit)?|begin(?:n|ning)?|début)(?:\s*(?:time|zeit|at|um))?\s*[:=]\s*"?([^";|]+?)"?\s*$/i.exec(
      line,
    )?.[1] ?? null
  const zone =
    /\b(?:time\s*zone|zeitzone|tz|fuseau)\s*[:=]\s*"?([A-Za-z]+(?:\/[A-Za-z_/+-]+)?|[+-]\d{2}:\d{2})/i.exec(
      line,
    )?.[1] ?? null
  const date =
    /\b(?:date|datum|day|tag|jour|fecha)\s*[:=]\s*"?(\d{1,4}[./-]\d{1,2}[./-]\d{1,4})"?\s*$/i.exec(
      line,
    )?.[1] ?? null
  return { date, unit: unit ?? null, start: start === null ? null : start.trim(), zone }
}

function inUnit(line: string): string | undefined {
  const token = /\b(?:values|pressures?|werte|drücke|all|alle)\b.*?\bin\s+([^\s;,"|.)]+)/i.exec(line)?.[1]
  return token !== undefined && unitOf(token) !== null ? token : undefined
}

function bracketUnit(line: string): string | undefined {
  const token = /\b(?:pressures?|druck|drücke|temperatures?|temperatur)\s*[[(]([^\])]+)[\])]/i.exec(line)?.[1]
  return token !== undefined && unitOf(token) !== null ? token : undefined
}
