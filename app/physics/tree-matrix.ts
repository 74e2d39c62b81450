/**
 * Gauss elimination of a balance matrix whose pattern is a tree: node i has one parent with a lower number. Working
 * from the leaves to the root leaves no fill, so it costs as much as the tridiagonal case, which is the tree without
 * branches.
 *
 * Every column is kept as what leaves its node for neighbours and what leaves it otherwise (`excess`), not as a
 * diagonal: then elimination only adds (Grassmann, Taksar and Heyman, Oper. Res. 33 (1985) 1107, from memory), and
 * long steps of a closed tube, where the diagonal would cancel to ten digits, lose none.
 */

export interface TreeMatrix {
  readonly parent: Int32Array
  /** Every node's parent is the one before it: a tube without branches. */
  readonly chain: boolean
  /** Column sums: what the node's balance loses in all for 1 unit of its own pressure. */
  readonly excess: Float64Array
  /** What goes to the parent for 1 unit of the node's pressure. */
  readonly up: Float64Array
  /** What comes from the parent for 1 unit of the parent's pressure. */
  readonly down: Float64Array
  /** After `factorTree`: reciprocal pivots, and the shares passed up and down. */
  readonly pivot: Float64Array
  readonly passUp: Float64Array
  readonly passDown: Float64Array
}

/** A zero matrix on this tree. */
export function treeMatrix(parent: Int32Array): TreeMatrix {
  const n = parent.length
  const column = () => new Float64Array(n)
  return {
    parent,
    chain: parent.every((node, i) => node === i - 1),
    excess: column(),
    up: column(),
    down: column(),
    pivot: column(),
    passUp: column(),
    passDown: column(),
  }
}

/** Factors the matrix. `excess` is used up; `up` and `down` stay. */
export function factorTree(matrix: TreeMatrix): void {
  if (matrix.chain) factorChain(matrix)
  else factorBranches(matrix)
}

/** Solves with a factored matrix; `values` holds the right side and is turned into the solution. */
export function solveTree(matrix: TreeMatrix, values: Float64Array): void {
  if (matrix.chain) solveChain(matrix, values)
  else solveBranches(matrix, values)
}

function factorBranches(matrix: TreeMatrix): void {
  const { parent, excess, up, down, pivot, passUp, passDown } = matrix
  for (let i = parent.length - 1; i > 0; i--) {
    const inverse = 1 / (excess[i]! + up[i]!)
    pivot[i] = inverse
    passUp[i] = up[i]! * inverse
    passDown[i] = down[i]! * inverse
    // Of what the parent gives down, the node keeps the part that leaves it otherwise.
    excess[parent[i]!]! += passDown[i]! * excess[i]!
  }
  pivot[0] = 1 / excess[0]!
}

function solveBranches(matrix: TreeMatrix, values: Float64Array): void {
  const { parent, pivot, passUp, passDown } = matrix
  const n = parent.length
  for (let i = n - 1; i > 0; i--) values[parent[i]!]! += passUp[i]! * values[i]!
  values[0]! *= pivot[0]!
  for (let i = 1; i < n; i++) values[i] = values[i]! * pivot[i]! + passDown[i]! * values[parent[i]!]!
}

// The same without branches: what is handed on stays in a register, which halves the time.
function factorChain({ excess, up, down, pivot, passUp, passDown }: TreeMatrix): void {
  let kept = excess[excess.length - 1]!
  for (let i = excess.length - 1; i > 0; i--) {
    const inverse = 1 / (kept + up[i]!)
    const pass = down[i]! * inverse
    pivot[i] = inverse
    passUp[i] = up[i]! * inverse
    passDown[i] = pass
    kept = excess[i - 1]! + pass * kept
  }
  pivot[0] = 1 / kept
}

function solveChain({ pivot, passUp, passDown }: TreeMatrix, values: Float64Array): void {
  const n = values.length
  let value = values[n - 1]!
  for (let i = n - 1; i > 0; i--) {
    value = values[i - 1]! + passUp[i]! * value
    values[i - 1] = value
  }
  value *= pivot[0]!
  values[0] = value
  for (let i = 1; i < n; i++) {
    value = values[i]! * pivot[i]! + passDown[i]! * value
    values[i] = value
  }
}
