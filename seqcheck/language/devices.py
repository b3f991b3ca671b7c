"""Controller, islands, outputs, signals and flags, with their times.

Takes the registry; gives the model's records; reports times that are missing or do not fit.
"""

from __future__ import annotations

from seqcheck.language.assumed import ANY
from seqcheck.language.conditions import Conditions, View
from seqcheck.language.problems import short
from seqcheck.language.registry import Registry
from seqcheck.language.syntax import ControllerText, FlagText, IslandText, OutputText, SignalText, Word
from seqcheck.language.times import CONTROLLER
from seqcheck.machine.conditions import TermKind, terms_of
from seqcheck.machine.devices import (
    Controller,
    ControllerKind,
    Flag,
    FollowingSignal,
    Island,
    Output,
    OutsideSignal,
    Signal,
)
from seqcheck.machine.time import NO_TIME, Span


def label_of(device: IslandText | OutputText | SignalText | FlagText) -> str | None:
    return device.marks.label.text if device.marks.label else None


def address_of(device: OutputText | SignalText) -> str | None:
    return device.marks.address.text if device.marks.address else None


def via_of(registry: Registry, via: Word | None) -> str | None:
    """The island behind ``via``."""
    return via.text if via is not None and registry.is_a(via, "io") else None


def resolve_controller(registry: Registry, text: ControllerText | None) -> Controller:
    """The controller; an ideal one where neither text nor sheet has any."""
    entries = registry.times.entries(CONTROLLER, "")
    if text is None and not entries:
        return _ordinary_controller(registry)
    place = text.place if text else next(iter(entries.values())).place

    def span(key: str) -> Span | None:
        return registry.times.span(CONTROLLER, "", key)

    edges = _edges(registry, CONTROLLER, "")
    scan, task, run = span("scan"), span("task"), span("run")
    if scan is None and task is None:
        scan = registry.assumed.take(CONTROLLER, ANY, "scan", None, place)
    if scan is not None:
        return Controller(ControllerKind.SCAN, scan, NO_TIME, *edges, place)
    if task is None:
        if registry.times_complete and registry.whole:
            where = entries["run"].place if "run" in entries else place
            registry.problems.report(
                where, "the controller has no round", "write `scan 8..12 ms` or `task 10 ms run 1..3 ms`"
            )
        return Controller(place=place)
    if run is None:
        registry.missing(entries["task"].place, "the controller's task", "run", "1..3 ms")
        run = NO_TIME
    if run.greatest > task.least:
        message = "the longest run of the task is over its shortest interval"
        registry.problems.report(entries["run"].place, message, "a task is done before it comes up again")
    return Controller(ControllerKind.TASK, task, run, *edges, place)


def _ordinary_controller(registry: Registry) -> Controller:
    """Where neither text nor sheet has a controller: an ideal one, unless ordinary times stand in."""
    scan, on, out = (registry.assumed.take(CONTROLLER, ANY, key, None, None) for key in ("scan", "input", "output"))
    if scan is None or on is None or out is None:
        return Controller()
    return Controller(ControllerKind.SCAN, scan, NO_TIME, on, on, out, out)


def resolve_island(registry: Registry, text: IslandText) -> Island:
    name = text.name.text
    update = registry.times.span("io", name, "update")
    if update is None:
        update = registry.assumed.take("io", ANY, "update", name, text.name.place)
    if update is None:
        registry.missing(text.name.place, name, "update", "2..4 ms")
    return Island(name, label_of(text), update or NO_TIME, *_edges(registry, "io", name), text.place)


def _edges(registry: Registry, section: str, name: str) -> tuple[Span, Span, Span, Span]:
    """Input on, input off, output on, output off."""
    on, off = (registry.times.span(section, name, f"input {edge}") or NO_TIME for edge in ("on", "off"))
    out_on, out_off = (registry.times.span(section, name, f"output {edge}") or NO_TIME for edge in ("on", "off"))
    return on, off, out_on, out_off


def resolve_output(registry: Registry, text: OutputText) -> Output:
    name = text.name.text
    on = registry.times.span("outputs", name, "on") or NO_TIME
    off = registry.times.span("outputs", name, "off") or NO_TIME
    return Output(name, address_of(text), label_of(text), on, off, via_of(registry, text.via), text.place)


def resolve_signal(registry: Registry, text: SignalText) -> Signal | None:
    """A signal; None where the condition it follows is broken."""
    name = text.name.text
    entries = registry.times.entries("signals", name)
    wrong = ("on", "off") if text.follows is None else ("after",)
    for key in wrong:
        if key in entries:
            what = "from outside has no" if text.follows is None else "that follows a condition has no"
            registry.problems.report(entries[key].place, f"{short(name)}: a signal {what} time {key}", "leave it out")
    if text.follows is None:
        after = registry.times.span("signals", name, "after")
        return OutsideSignal(name, address_of(text), label_of(text), after, text.place)
    condition = Conditions(registry, View.MACHINE).resolve(text.follows)
    if condition is None:
        return None
    on = registry.times.span("signals", name, "on") or NO_TIME
    off = registry.times.span("signals", name, "off") or NO_TIME
    return FollowingSignal(name, address_of(text), label_of(text), condition, on, off, text.place)


def resolve_flag(text: FlagText) -> Flag:
    return Flag(text.name.text, label_of(text), text.place)


def refuse_circles(registry: Registry, signals: dict[str, Signal]) -> None:
    """Report signals that follow themselves, directly or through others."""
    followed = {
        name: [term.subject for term in terms_of(signal.follows) if term.kind is TermKind.SIGNAL]
        for name, signal in signals.items()
        if isinstance(signal, FollowingSignal)
    }
    done: set[str] = set()
    for name in followed:
        trail: dict[str, None] = {}
        waiting = [(name, False)]
        while waiting:
            current, leaving = waiting.pop()
            if leaving:
                trail.pop(current)
                done.add(current)
            elif current in trail:
                circle = list(trail)[list(trail).index(current) :]
                message = "this signal follows itself: " + " follows ".join(map(short, [*circle, current]))
                registry.problems.report(signals[current].place, message, "let it follow the machine")
            elif current not in done and current in followed:
                trail[current] = None
                waiting.append((current, True))
                waiting += [(other, False) for other in followed[current]]
