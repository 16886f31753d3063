"""Makes data/datasets.json: published small networks and what numpy finds of their Laplacians.

Run with networkx >= 2.8 and numpy:  python3 tests/reference/make_datasets.py
Nodes are numbered in networkx's order; names are left out. The sweep breaks no ties: only cuts between
values that differ by more than 1e-9 count.
"""

import json
import pathlib

import networkx
import numpy

SOURCES = {
    "karate": "W. W. Zachary, An information flow model for conflict and fission in small groups, "
    "J. Anthropological Research 33, 1977; as networkx.karate_club_graph()",
    "florentine families": "R. L. Breiger and P. E. Pattison, Cumulated social roles: the duality of persons and "
    "their algebras, Social Networks 8, 1986; as networkx.florentine_families_graph()",
    "les miserables": "D. E. Knuth, The Stanford GraphBase, 1993; as networkx.les_miserables_graph()",
    "davis": "A. Davis, B. B. Gardner and M. R. Gardner, Deep South, 1941; as networkx.davis_southern_women_graph()",
    "krackhardt kite": "D. Krackhardt, Assessing the political landscape: structure, cognition, and power in "
    "organizations, Admin. Sci. Quarterly 35, 1990; as networkx.krackhardt_kite_graph()",
}


def describe(graph, weighted):
    index = {node: i for i, node in enumerate(graph)}
    edges = sorted(
        [*sorted((index[a], index[b])), (float(data.get("weight", 1)) if weighted else 1.0)]
        for a, b, data in graph.edges(data=True)
    )
    n = len(index)
    laplacian = numpy.zeros((n, n))
    for a, b, w in edges:
        laplacian[a, b] -= w
        laplacian[b, a] -= w
        laplacian[a, a] += w
        laplacian[b, b] += w
    values, vectors = numpy.linalg.eigh(laplacian)
    v = vectors[:, 1]
    above = [i for i in range(n) if v[i] > 0]
    below = [i for i in range(n) if v[i] <= 0]
    crossing = [e for e in edges if (v[e[0]] > 0) != (v[e[1]] > 0)]
    order = sorted(range(n), key=lambda i: v[i])
    best = None
    for k in range(1, n):
        if v[order[k]] - v[order[k - 1]] <= 1e-9:
            continue
        side = set(order[:k])
        cut = sum(w for a, b, w in edges if (a in side) != (b in side))
        ratio = cut / min(k, n - k)
        if best is None or ratio < best["ratio"] - 1e-12:
            best = {"ratio": ratio, "smaller": min(k, n - k), "weight": cut}
    heaviest = max(edges, key=lambda e: (v[e[0]] - v[e[1]]) ** 2)
    return {
        "nodes": n,
        "edges": edges,
        "spectrum": [float(x) for x in values[1:]],
        "smallerSide": min(above, below, key=len),
        "signCut": {"links": len(crossing), "weight": sum(e[2] for e in crossing)},
        "sweep": best,
        "steepest": {"link": heaviest[:2], "square": float((v[heaviest[0]] - v[heaviest[1]]) ** 2)},
    }


def main():
    graphs = [
        ("karate", networkx.karate_club_graph(), (False, True)),
        ("florentine families", networkx.florentine_families_graph(), (False,)),
        ("les miserables", networkx.les_miserables_graph(), (False, True)),
        ("davis", networkx.davis_southern_women_graph(), (False,)),
        ("krackhardt kite", networkx.krackhardt_kite_graph(), (False,)),
    ]
    items = []
    for name, graph, kinds in graphs:
        for weighted in kinds:
            entry = {"name": name, "weighted": weighted, "source": SOURCES[name]}
            items.append({**entry, **describe(graph, weighted)})
    made = f"tests/reference/make_datasets.py with networkx {networkx.__version__}, numpy {numpy.__version__}"
    target = pathlib.Path(__file__).parent / "data" / "datasets.json"
    lines = ",\n".join("  " + json.dumps(item) for item in items)
    target.write_text('{"madeBy": %s, "datasets": [\n%s\n]}\n' % (json.dumps(made), lines))


if __name__ == "__main__":
    main()
