from __future__ import annotations

from collections.abc import Iterator

import pytest
from harbour.manifests import Consignment, ManifestError, distinct_ids, read_manifest, tonnes_by_port


def test_a_line_has_four_fields() -> None:
    assert read_manifest("HRBU0000017;Saltby;12;salt\n\n") == [Consignment("HRBU0000017", "Saltby", 12, "salt")]


@pytest.mark.parametrize("line", ["HRBU0000017;Saltby;12", "HRBU0000017;Saltby;heavy;salt", ";;;"])
def test_a_bad_line_is_named(line: str) -> None:
    with pytest.raises(ManifestError, match="line 2: expected container;port;tonnes;contents"):
        read_manifest(f"HRBU0000001;Saltby;3;rope\n{line}\n")


# The budget of this test stands in pyproject.toml.
def test_every_line_becomes_a_consignment(manifest_text: str, problem_size: int) -> None:
    consignments = read_manifest(manifest_text)
    assert len(consignments) == problem_size
    assert manifest_text.startswith(consignments[0].container)
    assert manifest_text.endswith(f"{consignments[-1].contents}\n")


@pytest.mark.growth_budget("n")
def test_each_container_is_listed_once(repeated_ids: list[str], metered) -> None:
    with metered:
        kept = distinct_ids(repeated_ids)
    assert kept == list(dict.fromkeys(repeated_ids))


@pytest.mark.growth_budget("n")
# The smallest size is such that all eight ports are among the totals.
@pytest.mark.growth_budget("1", meter="peak_memory", smallest=16)
def test_totals_are_taken_without_holding_the_manifest(manifest_lines: Iterator[str], problem_size: int) -> None:
    totals = tonnes_by_port(manifest_lines)
    assert sum(totals.values()) == 7 * problem_size
    assert len(totals) <= 8
