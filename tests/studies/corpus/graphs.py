"""Bodies that call networkx."""

from __future__ import annotations

import random
from typing import Any

import networkx  # type: ignore[import-untyped]
import numpy as np

from .entry import CUBIC, LINEAR, LOGLINEAR, Shelf
from .inputs import Arguments, bulk

shelf = Shelf()


def random_graph(n: int, rng: random.Random) -> Arguments:
    """n vertices and 2 n edges with weights."""
    draw = bulk(rng)
    graph = networkx.Graph()
    graph.add_nodes_from(range(n))
    ends = draw.integers(0, n, (2 * n, 2)).tolist()
    graph.add_weighted_edges_from(
        (one, other, weight) for (one, other), weight in zip(ends, draw.random(2 * n).tolist(), strict=True)
    )
    return (graph,)


def component_count(graph: Any) -> int:
    laplacian = networkx.to_numpy_array(graph, weight=None)
    reach = np.linalg.matrix_power(np.eye(len(laplacian)) + (laplacian > 0), len(laplacian).bit_length() ** 2) > 0
    return len({tuple(row) for row in reach.tolist()})


@shelf.add(
    LINEAR,
    random_graph,
    tags="graph bimodal cache generator",
    reusable=True,
    largest=60_000,
    expected=lambda graph: len(networkx.node_connected_component(graph, 0)) - 1,
)
def breadth_first_edges(graph: Any) -> int:
    return sum(1 for _ in networkx.bfs_edges(graph, 0))


@shelf.add(
    LINEAR,
    random_graph,
    expected=component_count,
    tags="graph cache generator",
    reusable=True,
    largest=60_000,
)
def number_of_islands(graph: Any) -> int:
    return sum(1 for _ in networkx.connected_components(graph))


@shelf.add(
    LOGLINEAR,
    random_graph,
    tags="graph bimodal cache",
    reusable=True,
    largest=40_000,
    expected=lambda graph: len(networkx.node_connected_component(graph, 0)),
)
def shortest_lengths_in_graph(graph: Any) -> int:
    return len(networkx.single_source_dijkstra_path_length(graph, 0))


@shelf.add(
    LOGLINEAR,
    random_graph,
    tags="graph cache",
    reusable=True,
    largest=20_000,
    expected=lambda graph: len(graph) - networkx.number_connected_components(graph),
)
def edges_of_spanning_tree(graph: Any) -> int:
    return sum(1 for _ in networkx.minimum_spanning_edges(graph, data=False))


def layered_graph(n: int, rng: random.Random) -> Arguments:
    graph = networkx.DiGraph()
    graph.add_nodes_from(range(n))
    graph.add_edges_from(
        (min(pair), max(pair)) for pair in bulk(rng).integers(0, n, (2 * n, 2)).tolist() if pair[0] != pair[1]
    )
    return (graph,)


@shelf.add(
    LINEAR,
    layered_graph,
    expected=lambda graph: True,
    tags="graph cache generator",
    reusable=True,
    largest=60_000,
)
def order_of_work(graph: Any) -> bool:
    place = {job: i for i, job in enumerate(networkx.topological_sort(graph))}
    return all(place[before] < place[after] for before, after in graph.edges)


@shelf.add(
    CUBIC,
    random_graph,
    tags="graph slow hash",
    reusable=True,
    smallest=3,
    largest=150,
    expected=lambda graph: dict(networkx.all_pairs_dijkstra_path_length(graph)),
)
def all_lengths_in_graph(graph: Any) -> dict[Any, dict[Any, float]]:
    lengths = networkx.floyd_warshall(graph)
    return {
        one: {other: length for other, length in row.items() if length < float("inf")} for one, row in lengths.items()
    }
