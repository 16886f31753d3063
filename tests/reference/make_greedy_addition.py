"""Makes data/greedy-addition.json: the best new links of small networks, found by trying every pair.

Run with networkx >= 2.8 and numpy:  python3 tests/reference/make_greedy_addition.py
Nodes are numbered in networkx's order. Equally good pairs lead on to different ones, so each step is compared by itself, from `taken`.
"""

import json
import pathlib

import networkx
import numpy

LINKS = 3


def lambda2(laplacian):
    return float(numpy.linalg.eigvalsh(laplacian)[1])


def with_link(laplacian, a, b):
    more = laplacian.copy()
    more[a, a] += 1
    more[b, b] += 1
    more[a, b] -= 1
    more[b, a] -= 1
    return more


def grow(graph, links):
    index = {node: i for i, node in enumerate(graph)}
    edges = sorted(sorted((index[a], index[b])) for a, b in graph.edges())
    laplacian = numpy.zeros((len(index), len(index)))
    for a, b in edges:
        laplacian = with_link(laplacian, a, b)
    taken = set(map(tuple, edges))
    steps = [lambda2(laplacian)]
    links_taken = []
    for _ in range(links):
        pairs = [(a, b) for a in range(len(index)) for b in range(a + 1, len(index)) if (a, b) not in taken]
        best = max(pairs, key=lambda pair: lambda2(with_link(laplacian, *pair)))
        laplacian = with_link(laplacian, *best)
        taken.add(best)
        links_taken.append(best)
        steps.append(lambda2(laplacian))
    return {"nodes": len(index), "edges": edges, "lambda2": steps, "taken": links_taken}


sequences = [
    {"name": "karate", **grow(networkx.karate_club_graph(), LINKS)},
    {"name": "florentine families", **grow(networkx.florentine_families_graph(), LINKS)},
    {"name": "binary tree of 31", **grow(networkx.balanced_tree(2, 4), LINKS)},
    {"name": "path of 90", **grow(networkx.path_graph(90), 2)},
    {"name": "ladder of 2 x 45", **grow(networkx.ladder_graph(45), 2)},
]
out = pathlib.Path(__file__).parent / "data" / "greedy-addition.json"
source = (
    "The link with the largest exact lambda2 of all pairs, again and again, weight 1, combinatorial Laplacian; "
    f"make_greedy_addition.py with networkx {networkx.__version__}, numpy {numpy.__version__}"
)
lines = ",\n".join("  " + json.dumps(sequence) for sequence in sequences)
out.write_text(f'{{"source": {json.dumps(source)}, "sequences": [\n{lines}\n]}}\n')
