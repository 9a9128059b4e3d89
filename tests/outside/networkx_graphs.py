"""Planarity, degrees, tree-ness and components of graphs, by NetworkX.

Writes tests/data/networkx_graphs.json: random graphs near the edge of planarity with
NetworkX's verdict, and its verdict on the networks in tests/data/grown/ (grown by this
program; the Rust test grows them again and compares). With --check it recomputes everything
and fails on any difference. JSON Schema: the grown files are held against
docs/network.schema.json too, where the package jsonschema can be had.
"""

import json
import random
import sys
from pathlib import Path

import networkx as nx

ROOT = Path(__file__).resolve().parents[2]
DATA = ROOT / "tests" / "data" / "networkx_graphs.json"
GROWN = ROOT / "tests" / "data" / "grown"


def planar_cases():
    rng = random.Random(20261201)
    cases = []

    def add(name, graph):
        graph = nx.convert_node_labels_to_integers(graph)
        edges = [list(e) for e in graph.edges()]
        cases.append(
            {
                "name": name,
                "vertices": graph.number_of_nodes(),
                "edges": edges,
                "planar": nx.check_planarity(graph)[0],
            }
        )

    add("K5", nx.complete_graph(5))
    add("K33", nx.complete_bipartite_graph(3, 3))
    add("Petersen", nx.petersen_graph())
    add("dodecahedron", nx.dodecahedral_graph())
    add("icosahedron", nx.icosahedral_graph())
    add("Heawood", nx.heawood_graph())
    add("Frucht", nx.frucht_graph())
    add("Tutte", nx.tutte_graph())
    add("Pappus", nx.pappus_graph())
    add("grid 7 x 9", nx.grid_2d_graph(7, 9))
    add("torus 4 x 5", nx.grid_2d_graph(4, 5, periodic=True))
    add("wheel 12", nx.wheel_graph(12))
    add("Moebius ladder 16", nx.circulant_graph(16, [1, 8]))
    for k in range(300):
        n = rng.randint(5, 40)
        m = rng.randint(n, int(2.2 * n))
        add(f"random {k}", nx.gnm_random_graph(n, m, seed=rng.randint(0, 10**9)))
    for k in range(150):
        # A planar graph (points joined by a triangulation's edges, some dropped), sometimes
        # with one edge too many, its vertices renamed.
        n = rng.randint(6, 60)
        graph = nx.Graph()
        graph.add_edges_from([(0, 1), (1, 2), (2, 0)])
        faces = [(0, 1, 2), (0, 1, 2)]
        for v in range(3, n):
            a, b, c = faces.pop(rng.randrange(len(faces)))
            graph.add_edges_from([(v, a), (v, b), (v, c)])
            faces += [(a, b, v), (b, c, v), (c, a, v)]
        edges = list(graph.edges())
        graph.remove_edges_from(rng.sample(edges, rng.randint(0, len(edges) // 4)))
        if k % 2:
            graph.add_edge(*rng.sample(range(n), 2))
        names = list(range(n))
        rng.shuffle(names)
        add(f"triangulated {k}", nx.relabel_nodes(graph, dict(enumerate(names))))
    return cases


def grown_cases():
    cases = []
    for path in sorted(GROWN.glob("*.json")):
        network = json.loads(path.read_text())
        holders = {}
        for t, tensor in enumerate(network["tensor"]):
            for label in tensor["legs"]:
                holders.setdefault(label, []).append(t)
        graph = nx.MultiGraph()
        graph.add_nodes_from(range(len(network["tensor"])))
        graph.add_edges_from(h for h in holders.values() if len(h) == 2)
        disk = nx.Graph(graph)
        sites = network["boundary"]
        for k, label in enumerate(sites):
            disk.add_edge(("site", k), holders[label][0])
            disk.add_edge(("site", k), "hub")
            disk.add_edge(("site", k), ("site", (k + 1) % len(sites)))
        disk.remove_edges_from(list(nx.selfloop_edges(disk)))
        degrees = sorted({d for _, d in graph.degree()})
        cases.append(
            {
                "file": path.name,
                "planar": nx.check_planarity(nx.Graph(graph))[0],
                "planar_in_a_disk": nx.check_planarity(disk)[0],
                "tree": nx.is_tree(graph),
                "regular": len(degrees) == 1,
                "degrees": degrees,
                "components": nx.number_connected_components(graph),
                "cycles": graph.number_of_edges()
                - graph.number_of_nodes()
                + nx.number_connected_components(graph),
            }
        )
    return cases


def check_schema():
    try:
        import jsonschema
    except ImportError:
        return
    schema = json.loads((ROOT / "docs" / "network.schema.json").read_text())
    jsonschema.Draft202012Validator.check_schema(schema)
    validator = jsonschema.Draft202012Validator(schema)
    for path in sorted(GROWN.glob("*.json")):
        validator.validate(json.loads(path.read_text()))
    import tomllib

    for path in sorted((ROOT / "networks").glob("*.toml")):
        file = tomllib.loads(path.read_text())
        if "study" not in file:
            validator.validate(file)


def main():
    result = {
        "source": f"NetworkX {nx.__version__}",
        "planar": planar_cases(),
        "grown": grown_cases(),
    }
    check_schema()
    if "--check" in sys.argv:
        known = json.loads(DATA.read_text())
        for key in ["planar", "grown"]:
            assert known[key] == result[key], f"{key} differs from tests/data/{DATA.name}"
        print(f"{len(result['planar'])} graphs, {len(result['grown'])} networks: as recorded")
    else:
        DATA.write_text(json.dumps(result, separators=(",", ":")) + "\n")


if __name__ == "__main__":
    main()
