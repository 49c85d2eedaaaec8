"""The whole text is split into lines again to fetch each of them: n². Its budget stands in pyproject.toml."""

from __future__ import annotations

from harbour.manifests import Consignment


def read_manifest(text: str) -> list[Consignment]:
    consignments = []
    for number in range(text.count("\n")):
        container, port, tonnes, contents = text.splitlines()[number].split(";")
        consignments.append(Consignment(container, port, int(tonnes), contents))
    return consignments


def test_every_line_becomes_a_consignment(manifest_text: str, problem_size: int) -> None:
    consignments = read_manifest(manifest_text)
    assert len(consignments) == problem_size
    assert manifest_text.startswith(consignments[0].container)
    assert manifest_text.endswith(f"{consignments[-1].contents}\n")
