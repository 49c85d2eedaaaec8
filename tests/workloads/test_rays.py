"""Rays: each variable alone with the others held, then all together."""

from __future__ import annotations

from pytest_growthbudget.workloads.rays import rays


def test_one_variable_has_one_ray_without_a_name() -> None:
    (ray,) = rays({"rows": "row_count"}, 100)
    assert (ray.name, ray.variable) == ("", "rows")
    assert ray.assign(7) == {"row_count": 7}


def test_two_variables_have_three_rays() -> None:
    alone, other, together = rays({"V": "vertex_count", "E": "edge_count"}, 100)
    assert [ray.name for ray in (alone, other, together)] == ["V alone, E = 100", "E alone, V = 100", "V = E = n"]
    assert [ray.variable for ray in (alone, other, together)] == ["V", "E", "n"]
    assert alone.assign(7) == {"vertex_count": 7, "edge_count": 100}
    assert other.assign(7) == {"vertex_count": 100, "edge_count": 7}
    assert together.assign(7) == {"vertex_count": 7, "edge_count": 7}
