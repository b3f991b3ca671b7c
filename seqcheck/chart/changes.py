"""A change of a row's line, and an event in words."""

from __future__ import annotations

from seqcheck.checks.narrate import describe
from seqcheck.checks.study import Study
from seqcheck.machine.records import record


@record
class Change:
    """An event of the graph at which a row comes to a level; ``lasting`` as in ``model.Edge``. ``found``: it was so
    before, as far as anybody knows, and a choice that looks finds it; it has no part in when anything comes."""

    event: int
    level: int
    text: str
    lasting: bool = True
    found: bool = False


def words(study: Study, event: int) -> str:
    return describe(study, study.trace.graph.events[event]) or ""
