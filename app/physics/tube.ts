/**
 * Mesh of a tube with branches for the transport solver. Nodes stand on the tube where pressure is wanted; each owns
 * the volume and wall half way to its neighbours. Pumps, gauges, leaks, joints and both faces of every valve get a
 * node of their own, exactly where they stand. Nodes are ordered so that a parent always comes before its children:
 * that makes the matrix a tree, solved in one pass.
 */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { PhysicsError } from './errors.ts'

export interface TubeSection {
  readonly lengthM: number
  readonly diameterM: number
}

export interface TubeValve {
  readonly name: string
  readonly atM: number
  /** Clear bore when open, m. */
  readonly boreM: number
}

export interface TubeBranch {
  readonly name: string
  /** Where the branch leaves an earlier one; the first branch has none. */
  readonly from?: { readonly branch: string; readonly atM: number }
  /** Pieces of tube one behind the other, from the branch's zero. */
  readonly sections: readonly TubeSection[]
  /** Positions that need a node: pumps, gauges, leaks. */
  readonly pointsM?: readonly number[]
  readonly valves?: readonly TubeValve[]
}

export interface TubeMesh {
  readonly count: number
  /** Node nearer to the root; -1 for the root itself. */
  readonly parent: Int32Array
  readonly branchOf: Int32Array
  readonly atM: Float64Array
  readonly volumeM3: Float64Array
  readonly wallM2: Float64Array
  /** Diameter of the passage to the parent, m. */
  readonly passageDiameterM: Float64Array
  /** Length of the passage to the parent, m; 0 for a valve. */
  readonly passageLengthM: Float64Array
  /** Node whose passage to its parent is the valve. */
  readonly valveNodes: ReadonlyMap<string, number>
  readonly branches: readonly string[]
}

const SAME_POINT_M = 1e-6

/**
 * Builds the mesh with cells of at most `cellM`. Diffusion along a tube is itself a picture with a resolution of about
 * one diameter, so shorter cells are refused (points that stand closer still get their nodes). `finerThanBore` lifts
 * that, to show how a solution converges.
 */
export function buildMesh(
  branches: readonly TubeBranch[],
  cellM: number,
  options: { readonly finerThanBore?: boolean } = {},
): TubeMesh {
  requirePositive('cellM', cellM)
  const widestM = Math.max(0, ...branches.flatMap(({ sections }) => sections.map((one) => one.diameterM)))
  if (!options.finerThanBore && cellM < widestM) {
    throw new PhysicsError('cellM', cellM, `a length of at least the diameter, ${widestM} m`)
  }
  requireWithin('number of branches', branches.length, 1, 10_000)
  const draft = newDraft()
  const names = new Map<string, number>()
  for (const [index, branch] of branches.entries()) {
    if (names.has(branch.name)) throw new PhysicsError(`branch ${branch.name}`, index, 'a name used once')
    let root = -1
    if (index > 0) {
      const from = branch.from
      const earlier = from === undefined ? undefined : names.get(from.branch)
      if (from === undefined || earlier === undefined) {
        throw new PhysicsError(`start of branch ${branch.name}`, index, 'a position on an earlier branch')
      }
      root = draftNodeAt(draft, earlier, from.atM)
    }
    const joints = branches.flatMap((other) => (other.from?.branch === branch.name ? [other.from.atM] : []))
    names.set(branch.name, index)
    addBranch(draft, branch, index, root, joints, cellM)
  }
  return {
    count: draft.atM.length,
    parent: Int32Array.from(draft.parent),
    branchOf: Int32Array.from(draft.branchOf),
    atM: Float64Array.from(draft.atM),
    volumeM3: Float64Array.from(draft.volumeM3),
    wallM2: Float64Array.from(draft.wallM2),
    passageDiameterM: Float64Array.from(draft.passageDiameterM),
    passageLengthM: Float64Array.from(draft.passageLengthM),
    valveNodes: draft.valveNodes,
    branches: branches.map((branch) => branch.name),
  }
}

/** Node at a position of a branch; on a valve, the one on the near side. Throws where no node stands. */
export function meshNode(mesh: TubeMesh, branch: string, atM: number): number {
  return draftNodeAt(mesh, mesh.branches.indexOf(branch), atM)
}

interface Draft {
  parent: number[]
  branchOf: number[]
  atM: number[]
  volumeM3: number[]
  wallM2: number[]
  passageDiameterM: number[]
  passageLengthM: number[]
  valveNodes: Map<string, number>
}

function newDraft(): Draft {
  return {
    parent: [],
    branchOf: [],
    atM: [],
    volumeM3: [],
    wallM2: [],
    passageDiameterM: [],
    passageLengthM: [],
    valveNodes: new Map(),
  }
}

function draftNodeAt(
  nodes: { atM: ArrayLike<number>; branchOf: ArrayLike<number> },
  branch: number,
  atM: number,
): number {
  for (let i = 0; i < nodes.atM.length; i++) {
    if (nodes.branchOf[i] === branch && Math.abs(nodes.atM[i]! - atM) <= SAME_POINT_M) return i
  }
  throw new PhysicsError('position of a node, m', atM, 'a position named when the mesh was built')
}

function addNode(
  draft: Draft,
  parent: number,
  branch: number,
  atM: number,
  diameterM: number,
  lengthM: number,
): number {
  draft.parent.push(parent)
  draft.branchOf.push(branch)
  draft.atM.push(atM)
  draft.volumeM3.push(0)
  draft.wallM2.push(0)
  draft.passageDiameterM.push(diameterM)
  draft.passageLengthM.push(lengthM)
  const node = draft.atM.length - 1
  if (parent >= 0 && lengthM > 0) {
    // Both ends of the passage own half of it.
    for (const end of [parent, node]) {
      draft.volumeM3[end]! += ((Math.PI * diameterM ** 2) / 8) * lengthM
      draft.wallM2[end]! += (Math.PI * diameterM * lengthM) / 2
    }
  }
  return node
}

function addBranch(
  draft: Draft,
  branch: TubeBranch,
  index: number,
  root: number,
  joints: readonly number[],
  cellM: number,
): void {
  const edges = [0]
  for (const section of branch.sections) {
    requirePositive('lengthM', section.lengthM)
    requirePositive('diameterM', section.diameterM)
    edges.push(edges.at(-1)! + section.lengthM)
  }
  const lengthM = edges.at(-1)!
  requirePositive(`length of branch ${branch.name}`, lengthM)
  const valves = [...(branch.valves ?? [])].sort((a, b) => a.atM - b.atM)
  const wanted = [...edges, ...(branch.pointsM ?? []), ...joints, ...valves.map((valve) => valve.atM)]
  for (const x of wanted) requireWithin(`position on branch ${branch.name}`, x, 0, lengthM)
  wanted.sort((a, b) => a - b)
  // Measured from the last one kept, so that a crowd of near points cannot drift away from it.
  const marks: number[] = []
  for (const x of wanted) if (marks.length === 0 || x - marks.at(-1)! > SAME_POINT_M) marks.push(x)

  let node = root < 0 ? addNode(draft, -1, index, 0, branch.sections[0]!.diameterM, 0) : root
  let section = 0
  for (const [i, mark] of marks.entries()) {
    if (i > 0) {
      while (edges[section + 1]! < mark - SAME_POINT_M) section++
      const start = marks[i - 1]!
      const cells = Math.max(1, Math.ceil((mark - start) / cellM - 1e-9))
      requireWithin('number of cells', cells, 1, 1e6)
      const step = (mark - start) / cells
      for (let cell = 1; cell <= cells; cell++) {
        const x = cell === cells ? mark : start + cell * step
        node = addNode(draft, node, index, x, branch.sections[section]!.diameterM, step)
      }
    }
    for (const valve of valves) {
      if (Math.abs(valve.atM - mark) > SAME_POINT_M) continue
      requirePositive(`bore of valve ${valve.name}`, valve.boreM)
      if (draft.valveNodes.has(valve.name)) {
        throw new PhysicsError(`valve ${valve.name}`, valve.atM, 'a name used once')
      }
      node = addNode(draft, node, index, mark, valve.boreM, 0)
      draft.valveNodes.set(valve.name, node)
    }
  }
  const sealed = draft.volumeM3.indexOf(0)
  if (sealed >= 0) {
    throw new PhysicsError('position of a valve, m', draft.atM[sealed]!, 'tube on both sides of every valve')
  }
}
