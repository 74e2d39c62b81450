/**
 * Gauss elimination of a matrix whose pattern is a tree: node i has one parent with a lower number. Working from the
 * leaves to the root leaves no fill, so it costs as much as the tridiagonal case, which is the tree without branches.
 */

/** Entries on the diagonal, from node to parent (row of the node) and from parent to node (row of the parent). */
export interface TreeMatrix {
  readonly parent: Int32Array
  readonly diagonal: Float64Array
  readonly toParent: Float64Array
  readonly fromParent: Float64Array
}

/** A zero matrix on this tree. */
export function treeMatrix(parent: Int32Array): TreeMatrix {
  const n = parent.length
  return {
    parent,
    diagonal: new Float64Array(n),
    toParent: new Float64Array(n),
    fromParent: new Float64Array(n),
  }
}

/** Factors the matrix in place; afterwards `fromParent` holds the multipliers. */
export function factorTree(matrix: TreeMatrix): void {
  const { parent, diagonal, toParent, fromParent } = matrix
  for (let i = parent.length - 1; i > 0; i--) {
    const factor = fromParent[i]! / diagonal[i]!
    fromParent[i] = factor
    diagonal[parent[i]!]! -= factor * toParent[i]!
  }
}

/** Solves with a factored matrix; `values` holds the right side and is turned into the solution. */
export function solveTree(matrix: TreeMatrix, values: Float64Array): void {
  const { parent, diagonal, toParent, fromParent } = matrix
  const n = parent.length
  for (let i = n - 1; i > 0; i--) values[parent[i]!]! -= fromParent[i]! * values[i]!
  values[0]! /= diagonal[0]!
  for (let i = 1; i < n; i++) values[i] = (values[i]! - toParent[i]! * values[parent[i]!]!) / diagonal[i]!
}
