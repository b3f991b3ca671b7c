"""The timed state graph for other programs, as GraphML and as DOT.

Takes states and the runs between them; gives text, the same for the same graph. Times are whole microseconds; a
greatest that nothing limits is left out.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from seqcheck.machine.findings import State, StateRun

if TYPE_CHECKING:
    import networkx


def as_networkx(states: Sequence[State], runs: Sequence[StateRun]) -> networkx.MultiDiGraph[int]:
    """Nodes with ``name``; edges with ``way``, ``least_us``, ``typical_us`` and ``greatest_us``."""
    import networkx

    graph: networkx.MultiDiGraph[int] = networkx.MultiDiGraph()
    for state in states:
        graph.add_node(state.number, name=state.name)
    for number, run in enumerate(runs):
        facts: dict[str, str | int] = {"least_us": run.duration.least, "typical_us": run.duration.typical}
        if run.duration.greatest is not None:
            facts["greatest_us"] = run.duration.greatest
        if run.way is not None:
            facts["way"] = run.way
        graph.add_edge(run.begin, run.end, key=number, **facts)
    return graph


def graphml(states: Sequence[State], runs: Sequence[StateRun]) -> str:
    import networkx

    return "\n".join(networkx.generate_graphml(as_networkx(states, runs), named_key_ids=True)) + "\n"


def dot(name: str, states: Sequence[State], runs: Sequence[StateRun]) -> str:
    lines = [f"digraph {_quoted(name)} {{"]
    lines += [
        f"  {state.number} [label={_quoted(f'{state.number}: {state.name}')}"
        f"{', shape=diamond' if state.choice is not None else ''}];"
        for state in states
    ]
    lines += [f"  {run.begin} -> {run.end} [label={_quoted(_label(run))}];" for run in runs]
    return "\n".join((*lines, "}")) + "\n"


def _label(run: StateRun) -> str:
    time = run.duration
    greatest = "open" if time.greatest is None else f"{time.greatest} us"
    way = f"{run.way}: " if run.way is not None else ""
    return f"{way}{time.least} us .. {greatest}"


def _quoted(text: str) -> str:
    escaped = text.replace("\\", "\\\\").replace('"', '\\"').replace("\n", " ")
    return f'"{escaped}"'
