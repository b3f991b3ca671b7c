"""A run in the words of the machine.

Takes a witness; gives the moments that tell it, counted from the first of them. Events that only the graph needs
(waits for a read, the last of several causes) are left out: their times show in what follows.
"""

from __future__ import annotations

from seqcheck.checks.check import Instead
from seqcheck.checks.study import Study
from seqcheck.engine.graph import Event
from seqcheck.engine.trace import Visit
from seqcheck.engine.witness import Witness
from seqcheck.machine.findings import Moment
from seqcheck.machine.time import WHOLE_SHARE


def narrate(study: Study, run: Witness, instead: Instead | None = None) -> tuple[Moment, ...]:
    """The moments on the way to a broken pair, the pair itself included."""
    numbers = (*_lead_in(study, run.chain[0]), *run.chain)
    return _moments(study, [(run.times.get(number, study.time(number)), number) for number in numbers], instead)


def narrate_typical(study: Study, begin: int, end: int) -> tuple[Moment, ...]:
    """What happens in the played run, at its typical times, from one event to another."""
    between = range(study.time(begin), study.time(end) + 1)
    happened = [(study.time(number), number) for number in study.trace.happened if study.time(number) in between]
    return _moments(study, sorted(happened))


def _moments(study: Study, timed: list[tuple[int, int]], instead: Instead | None = None) -> tuple[Moment, ...]:
    reads = study.reads_by_event
    told: list[tuple[int, str]] = []
    for time, number in timed:
        event = study.trace.graph.events[number]
        texts = [text] if (text := describe(study, event)) else []
        if number in reads:
            texts += _steps(reads[number].left, "left")
            turns = instead is not None and instead.at == number
            texts += [instead.text] if instead is not None and turns else _steps(reads[number].entered, "entered")
        told += [(time, text) for text in texts]
    start = told[0][0] if told else 0
    return tuple(Moment(time - start, text) for time, text in told)


def _lead_in(study: Study, event: int) -> list[int]:
    """From the last read before the run that entered a step: where the reader knows the machine to be."""
    arcs = study.trace.graph.arcs
    way: list[int] = []
    while not (event in study.reads_by_event and study.reads_by_event[event].entered) and arcs[event]:
        event = max(arcs[event], key=lambda arc: study.time(arc.cause) + arc.span.typical).cause
        way.append(event)
    return way[::-1]


def _steps(visits: list[Visit], how: str) -> list[str]:
    return [f"step {visit.step.name} {how}" for visit in visits]


def describe(study: Study, event: Event) -> str | None:
    """What a user would call the event; None for one that only the graph needs."""
    subject, detail = event.subject, event.detail
    match event.what:
        case "coil":
            return f"{subject} {'energized' if detail == 'on' else 'released'}"
        case "output":
            return f"{subject} switches {detail}"
        case "valve":
            return f"{subject} reaches {detail}"
        case "mark":
            return f"{subject} {_mark(int(detail))}"
        case "leaves":
            return f"{subject} leaves its {'extended' if int(detail) else 'retracted'} end"
        case "stands":
            return f"{subject} stands still"
        case "sensor":
            return f"{subject} switches {detail}"
        case "signal":
            return f"signal {subject} {'comes' if detail == 'on' else 'goes'}"
        case "input":
            return f"input {subject} {detail}"
        case "seen":
            return f"controller sees {subject} {detail}"
        case "pulse over":
            return f"pulse of {subject} over"
        case "dwell over":
            return f"dwell of {subject} over"
        case "watchdog":
            return f"watchdog of {subject} runs out"
        case "decayed":
            return f"{subject} no longer pulls"
        case _:
            return None


def _mark(position: int) -> str:
    if position == 0:
        return "fully retracted"
    if position == WHOLE_SHARE:
        return "fully extended"
    return f"passes {position * 100 / WHOLE_SHARE:g} %"
