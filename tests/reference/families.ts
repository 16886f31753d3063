import type { SparseGraph } from '@/lib/method/graph'
import { complete, dumbbell, path, ring, star } from '@/lib/method/graphs'
import * as make from './build'

export interface Family {
  named: RegExp
  build: (...numbers: number[]) => SparseGraph
  /** λ₂ in closed form; null where it is a root that has to be computed. */
  lambda2: ((...numbers: number[]) => number) | null
}

const { cos, PI, sqrt, min, max, ceil } = Math
const pathValue = (n: number) => 2 * (1 - cos(PI / n))
const ringValue = (n: number) => 2 * (1 - cos((2 * PI) / n))
/** Smaller root of x² − s·x + p. */
const root = (s: number, p: number) => (2 * p) / (s + sqrt(s * s - 4 * p))

/**
 * Families whose λ₂ is known in closed form. Paths, rings, complete and complete bipartite graphs, products
 * (λ of a product is a sum), joins and complements (λ ↦ n − λ): B. Mohar, "The Laplacian spectrum of graphs", 1991;
 * M. Fiedler, Czech. Math. J. 23, 1973. Strongly regular and distance-regular graphs: A. Brouwer and W. Haemers,
 * "Spectra of Graphs", 2012. Double stars, barbells, dumbbells: quotients by the obvious equitable partition.
 */
export const FAMILIES: readonly Family[] = [
  { named: /^P_(\d+)$/, build: path, lambda2: pathValue },
  { named: /^C_(\d+)$/, build: ring, lambda2: ringValue },
  { named: /^K_(\d+)$/, build: complete, lambda2: (n) => n! },
  { named: /^K_1,(\d+) \(star/, build: star, lambda2: () => 1 },
  { named: /^K_(\d+),(\d+)$/, build: make.multipartite, lambda2: min },
  { named: /^Q_(\d+)$/, build: make.hypercube, lambda2: () => 2 },
  {
    named: /^grid P_(\d+) x P_(\d+)$/,
    build: (a, b) => make.product(path(a!), path(b!)),
    lambda2: (a, b) => pathValue(max(a!, b!)),
  },
  {
    named: /^torus C_(\d+) x C_(\d+)$/,
    build: (a, b) => make.product(ring(a!), ring(b!)),
    lambda2: (a, b) => ringValue(max(a!, b!)),
  },
  {
    named: /^cylinder C_(\d+) x P_(\d+)$/,
    build: (a, b) => make.product(ring(a!), path(b!)),
    lambda2: (a, b) => min(ringValue(a!), pathValue(b!)),
  },
  {
    named: /^prism C_(\d+) x K_2$/,
    build: (a) => make.product(ring(a!), complete(2)),
    lambda2: (a) => min(2, ringValue(a!)),
  },
  {
    named: /^ladder P_(\d+) x K_2$/,
    build: (a) => make.product(path(a!), complete(2)),
    lambda2: (a) => pathValue(a!),
  },
  {
    named: /^rook K_(\d+) x K_(\d+)$/,
    build: (a, b) => make.product(complete(a!), complete(b!)),
    lambda2: min,
  },
  { named: /^Petersen$/, build: () => make.kneser(5, 2), lambda2: () => 2 },
  {
    named: /^wheel W_(\d+) /,
    build: (n) => make.join(complete(1), ring(n! - 1)),
    lambda2: (n) => 1 + ringValue(n! - 1),
  },
  {
    named: /^fan K_1 v P_(\d+)$/,
    build: (n) => make.join(complete(1), path(n!)),
    lambda2: (n) => 1 + pathValue(n!),
  },
  {
    named: /^cocktail party K_(\d+)x2$/,
    build: (k) => make.multipartite(...Array<number>(k!).fill(2)),
    lambda2: (k) => 2 * k! - 2,
  },
  {
    named: /^K_\{(\d+),(\d+),(\d+)\}/,
    build: make.multipartite,
    lambda2: (a, b, c) => a! + b! + c! - max(a!, b!, c!),
  },
  {
    named: /^K_n - e, n=(\d+)$/,
    build: (n) => make.complement(make.union(complete(2), make.empty(n! - 2))),
    lambda2: (n) => n! - 2,
  },
  {
    named: /^Turan T\((\d+),(\d+)\)$/,
    build: (n, r) => make.graphWhere(n!, (i, j) => i % r! !== j % r!),
    lambda2: (n, r) => n! - ceil(n! / r!),
  },
  {
    named: /^balanced double star k=(\d+) /,
    build: (k) => make.withLinks(make.union(star(k!), star(k!)), [[0, k! + 1]]),
    lambda2: (k) => root(k! + 3, 2),
  },
  {
    named: /^barbell 2xK_(\d+), one bridge$/,
    build: (k) => dumbbell(k!, 1),
    lambda2: (k) => root(k! + 2, 2),
  },
  {
    named: /^barbell 2xK_(\d+), path of 1 vertex$/,
    build: (k) =>
      make.withLinks(make.union(complete(k!), complete(1), complete(k!)), [
        [0, k!],
        [k!, k! + 1],
      ]),
    lambda2: (k) => root(k! + 1, 1),
  },
  { named: /^lollipop K_(\d+)\+pendant$/, build: (k) => make.lollipop(k!, 1), lambda2: () => 1 },
  { named: /^lollipop K_(\d+)\+tail (\d+)$/, build: make.lollipop, lambda2: null },
  {
    named: /^friendship F_(\d+)$/,
    build: (k) => make.join(complete(1), make.union(...make.range(k!).map(() => complete(2)))),
    lambda2: () => 1,
  },
  {
    named: /^windmill Wd\((\d+),(\d+)\)$/,
    build: (k, copies) =>
      make.join(complete(1), make.union(...make.range(copies!).map(() => complete(k! - 1)))),
    lambda2: () => 1,
  },
  { named: /^Heawood$/, build: () => make.fromJumps([5, -5], 7), lambda2: () => 3 - sqrt(2) },
  { named: /^Pappus$/, build: () => make.fromJumps([5, 7, -7, 7, -7, -5], 3), lambda2: () => 3 - sqrt(3) },
  { named: /^Desargues$/, build: () => make.fromJumps([5, -5, 9, -9], 5), lambda2: () => 1 },
  {
    named: /^dodecahedron$/,
    build: () => make.fromJumps([10, 7, 4, -4, -7, 10, -4, 7, -7, 4], 2),
    lambda2: () => 3 - sqrt(5),
  },
  { named: /^icosahedron$/, build: make.icosahedron, lambda2: () => 5 - sqrt(5) },
  { named: /^octahedron$/, build: () => make.multipartite(2, 2, 2), lambda2: () => 4 },
  { named: /^cube$/, build: () => make.hypercube(3), lambda2: () => 2 },
  { named: /^Paley (\d+)$/, build: make.paley, lambda2: (q) => (q! - sqrt(q!)) / 2 },
  { named: /^Mobius-Kantor$/, build: () => make.fromJumps([5, -5], 8), lambda2: () => 3 - sqrt(3) },
  { named: /^Hoffman-Singleton$/, build: make.hoffmanSingleton, lambda2: () => 5 },
  {
    named: /^Clebsch \(folded 5-cube\)$/,
    build: () =>
      make.withLinks(
        make.hypercube(4),
        make.range(8).map((i) => [i, 15 - i] as const),
      ),
    lambda2: () => 4,
  },
  { named: /^Kneser K\(6,2\)$/, build: () => make.kneser(6, 2), lambda2: () => 5 },
  {
    named: /^complement of Kneser\(5,2\)/,
    build: () => make.complement(make.kneser(5, 2)),
    lambda2: () => 5,
  },
  {
    named: /^complement of P_(\d+):/,
    build: (n) => make.complement(path(n!)),
    lambda2: (n) => n! - 2 * (1 + cos(PI / n!)),
  },
  {
    named: /^dumbbell 2xK_(\d+), (\d+) disjoint bridges$/,
    build: dumbbell,
    lambda2: (k, bridges) => root(k! + 2, 2 * bridges!),
  },
]

export function familyOf(name: string): { family: Family; numbers: number[] } {
  for (const family of FAMILIES) {
    const match = family.named.exec(name)
    if (match) return { family, numbers: match.slice(1).map(Number) }
  }
  throw new Error(`no family is named ${name}`)
}
