/** The product's sources, parsed, for tests that hold them to the rules of the code base. */
import { readdirSync, readFileSync } from 'node:fs'
import { join, posix } from 'node:path'
import ts from 'typescript'

export interface Import {
  line: number
  /** As written: a package, "node:fs", or for files of ours the path from the project's root. */
  target: string
  /** Types only: nothing of it is left when the code runs. */
  typeOnly: boolean
}

export interface SourceFile {
  path: string
  lineCount: number
  imports: Import[]
  /** Things asked of the surroundings that some folders may not ask: what, and on which line. */
  uses: { line: number; what: 'process.env' | 'console' | 'time of the machine' | 'a transaction' }[]
}

/** Every TypeScript file under a folder, paths from the project's root with forward slashes. */
export function readSources(folder: string): SourceFile[] {
  return readdirSync(folder, { recursive: true, encoding: 'utf8' })
    .filter((name) => /\.tsx?$/.test(name))
    .map((name) => posix.normalize(join(folder, name).replaceAll('\\', '/')))
    .sort()
    .map((path) => parseSource(path, readFileSync(path, 'utf8')))
}

/** One file's imports and uses. */
export function parseSource(path: string, text: string): SourceFile {
  const kind = path.endsWith('x') ? ts.ScriptKind.TSX : ts.ScriptKind.TS
  const root = ts.createSourceFile(path, text, ts.ScriptTarget.Latest, true, kind)
  const file: SourceFile = { path, lineCount: text.trimEnd().split('\n').length, imports: [], uses: [] }
  const lineOf = (node: ts.Node) => root.getLineAndCharacterOfPosition(node.getStart()).line + 1

  function visit(node: ts.Node): void {
    const found = importOf(node)
    if (found !== null) {
      file.imports.push({ ...found, line: lineOf(node), target: resolve(path, found.target) })
    }
    const what = askedBy(node)
    if (what !== null) file.uses.push({ line: lineOf(node), what })
    ts.forEachChild(node, visit)
  }
  visit(root)
  return file
}

function importOf(node: ts.Node): { target: string; typeOnly: boolean } | null {
  if (ts.isImportDeclaration(node) && ts.isStringLiteral(node.moduleSpecifier)) {
    return { target: node.moduleSpecifier.text, typeOnly: isTypeOnly(node.importClause) }
  }
  if (ts.isExportDeclaration(node) && node.moduleSpecifier && ts.isStringLiteral(node.moduleSpecifier)) {
    return { target: node.moduleSpecifier.text, typeOnly: node.isTypeOnly }
  }
  if (ts.isCallExpression(node) && node.expression.kind === ts.SyntaxKind.ImportKeyword) {
    const [argument] = node.arguments
    if (argument && ts.isStringLiteral(argument)) return { target: argument.text, typeOnly: false }
  }
  return null
}

/** `import type …`, or braces that hold nothing but types. */
function isTypeOnly(clause: ts.ImportClause | undefined): boolean {
  if (clause === undefined) return false
  if (clause.isTypeOnly) return true
  const bindings = clause.namedBindings
  if (clause.name !== undefined || bindings === undefined || !ts.isNamedImports(bindings)) return false
  return bindings.elements.length > 0 && bindings.elements.every((element) => element.isTypeOnly)
}

function resolve(from: string, target: string): string {
  if (target.startsWith('#')) return target.slice(1)
  return target.startsWith('.') ? posix.join(posix.dirname(from), target) : target
}

function askedBy(node: ts.Node): SourceFile['uses'][number]['what'] | null {
  if (ts.isPropertyAccessExpression(node)) {
    const written = `${node.expression.getText()}.${node.name.text}`
    if (written === 'process.env') return 'process.env'
    if (node.expression.getText() === 'console') return 'console'
    if (written === 'Date.now' || written === 'performance.timeOrigin') return 'time of the machine'
    if (node.name.text === 'transaction') return 'a transaction'
  }
  if (
    ts.isNewExpression(node) &&
    node.expression.getText() === 'Date' &&
    (node.arguments ?? []).length === 0
  ) {
    return 'time of the machine'
  }
  return null
}
