"""Longest paths by networkx against the bounds, on the event graphs of the example machines.

Where one event of a pair comes before the other on every chain of causes, as the start of a cycle does before its end,
the greatest separation is the longest path over the greatest delays, and the least that over the least delays.
"""

from __future__ import annotations

from pathlib import Path

import networkx
import pytest

from seqcheck.engine.bounds import is_open
from seqcheck.language.source import Source, read_source
from tests.outside.asked import Question, asked_about

EXAMPLES = Path(__file__).resolve().parents[2] / "examples"


@pytest.mark.parametrize("file", sorted(EXAMPLES.rglob("*.steps")), ids=lambda file: file.stem)
def test_bounds_of_cycles_and_all_pairs_in_a_row_are_longest_paths(file: Path) -> None:
    source = read_source(str(file))
    assert isinstance(source, Source)
    report, questions = asked_about(source)
    assert not report.problems
    found: set[tuple[int, int]] = set()
    for question in questions:
        if not question.graph.assumed:
            found |= set(_held_against_networkx(question))
    # Where several sequences or choices make up a cycle it is put together from several runs.
    whole = len(report.cycles) == 1 and "choose {" not in source.text
    for name, cycle in report.cycles if whole else ():
        assert cycle.least in {least for least, _ in found}, f"{name}: {cycle.least} is no longest path"
        assert cycle.greatest in {greatest for _, greatest in found}, f"{name}: {cycle.greatest} is no longest path"


def _held_against_networkx(question: Question) -> list[tuple[int, int]]:
    """Least and greatest time of each pair that was asked and of which one dominates the other."""
    graph, answers = question.graph, question.answers
    pairs = [(one, other) for one, other in answers if graph.dominates(one, other) and (other, one) in answers]
    exported = graph.as_networkx()
    found = []
    for one, other in pairs:
        between = (networkx.descendants(exported, one) & networkx.ancestors(exported, other)) | {one, other}
        part = exported.subgraph(between)
        least, greatest = (networkx.dag_longest_path_length(part, weight=weight) for weight in ("least", "greatest"))
        assert -answers[other, one] == least
        assert answers[one, other] == greatest or (is_open(greatest) and is_open(answers[one, other]))
        found.append((least, greatest))
    return found
