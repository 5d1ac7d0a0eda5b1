"""Maximal cliques by networkx (Bron & Kerbosch 1973, in the form of Tomita, Tanaka & Takahashi 2006).

Reads a JSON list of {"nodes": n, "edges": [[a, b], ..]} and prints, for each, the sorted list of its maximal cliques.
"""

import json
import sys

import networkx

answers = []
for case in json.load(sys.stdin):
    graph = networkx.Graph()
    graph.add_nodes_from(range(case["nodes"]))
    graph.add_edges_from(case["edges"])
    answers.append(sorted(sorted(clique) for clique in networkx.find_cliques(graph)))
json.dump(answers, sys.stdout)
