"""The timed state graph in plain words, numbered from 1 in the order in which a play comes to the states."""

from __future__ import annotations

from seqcheck.engine.states import Run, State, TimedStates
from seqcheck.machine.findings import State as ShownState
from seqcheck.machine.findings import StateRun
from seqcheck.machine.steps import Choose


def shown_states(timed: TimedStates) -> tuple[ShownState, ...]:
    return tuple(
        ShownState(state.number + 1, _name(state), None if state.choose is None else state.choose.place)
        for state in timed.states
    )


def shown_runs(timed: TimedStates) -> tuple[StateRun, ...]:
    choices = {state.number: state for state in timed.states}
    runs = sorted(timed.runs, key=lambda run: (run.begin, _branch(run), run.end))
    return tuple(StateRun(run.begin + 1, run.end + 1, _way(choices[run.begin], run), run.duration) for run in runs)


def _name(state: State) -> str:
    if state.choose is None:
        return f"{state.step} entered" if state.step is not None else f"{state.sequence} begins"
    behind = f" behind {state.after}" if state.after else ""
    return f"choose in line {state.choose.place.line}{behind}"


def _branch(run: Run) -> int:
    return -1 if run.outcome is None or run.outcome.taken is None else run.outcome.taken


def _way(state: State, run: Run) -> str | None:
    if run.outcome is None or state.choose is None:
        return None
    if run.outcome.taken is None:
        signals = ", ".join(f"{'' if on else 'not '}{name}" for name, on in run.outcome.signals)
        return f"waits ({signals})"
    return branch_name(state.choose, run.outcome.taken)


def branch_name(choose: Choose, number: int) -> str:
    choice = choose.choices[number]
    return f"{'otherwise' if choice.condition is None else 'when'} in line {choice.place.line}"
