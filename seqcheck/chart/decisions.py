"""Choices in words: which branch one takes, and which way a chart shows.

Takes choices as they were taken in a play; gives text.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence

from seqcheck.chart.window import Window
from seqcheck.checks.study import Study
from seqcheck.compare.spelling import spelled_condition
from seqcheck.engine.trace import Choice


def decision_words(choice: Choice) -> str:
    """``when glue_ok (branch 1 of 2)``"""
    if choice.taken is None:
        return "its time runs out"
    condition = choice.choose.choices[choice.taken].condition
    words = "otherwise" if condition is None else f"when {spelled_condition(condition)}"
    return f"{words} (branch {choice.taken + 1} of {len(choice.conditions)})"


def way_shown(window: Window, others: bool) -> Iterator[str]:
    """How the choices in the window go; ``others``: and how to see what else they may do."""
    study = window.study
    taken: dict[int, list[Choice]] = {}
    for choice in study.trace.choices:
        if choice.left is not None and window.begin <= study.time(choice.left.event) < window.end:
            taken.setdefault(choice.choose.place.line, []).append(choice)
    if taken:
        ways = (
            f"in line {line} {', then '.join(dict.fromkeys(map(decision_words, choices)))}"
            for line, choices in taken.items()
        )
        yield f"The way shown: {'; '.join(ways)}."
    if others:
        yield from _another(study, taken)


def _another(study: Study, taken: Mapping[int, Sequence[Choice]]) -> Iterator[str]:
    """One that signals from outside may bring about."""
    for passage in study.settlement.path.passages:
        if passage.choice is not None and passage.choice.choose.place.line in taken:
            line = passage.choice.choose.place.line
            gone = {choice.taken for choice in taken[line]}
            for outcome in passage.outcomes:
                if outcome.taken is not None and outcome.taken not in gone:
                    yield f"Another way: --choice {line}={outcome.taken + 1}."
                    return
