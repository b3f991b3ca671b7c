"""What a chart says: events with their bounds, rows, marks of findings, the critical path."""

from __future__ import annotations

import random
from collections.abc import Sequence
from dataclasses import replace
from itertools import pairwise
from pathlib import Path

import pytest

from seqcheck.chart.asked import Part, Unplaceable
from seqcheck.chart.build import chart_of
from seqcheck.chart.events import lines
from seqcheck.chart.model import HIGH, LOW, MIDDLE, RowKind
from seqcheck.chart.view import whole_time
from seqcheck.chart.window import anchor_of, window_of
from seqcheck.checks.study import Study
from seqcheck.engine.bounds import both_ways, greatest_separations
from seqcheck.engine.controller import Outcome
from seqcheck.engine.cylinders import Placed
from seqcheck.engine.player import Player
from seqcheck.engine.trace import Choice, Read
from seqcheck.machine.time import Span
from tests.chart.charts import (
    CLAMP,
    EXAMPLES,
    MIXED,
    QUESTION,
    TEXTS,
    all_edges,
    band_edges,
    chart,
    chart_of_finding,
    row,
    studied_text,
    times,
)


class Rounds:
    """Lets a play go on for so many cycles; ``outcome``: which of its outcomes each choice has."""

    def __init__(self, cycles: int, outcome: int = 0) -> None:
        self.player: Player | None = None
        self._cycles = cycles
        self._outcome = outcome

    def decide(self, choice: Choice, outcomes: Sequence[Outcome]) -> Outcome:
        return outcomes[self._outcome]

    def round_begins(self, read: Read, sequence: str) -> None:
        if self.player is not None and len(self.player.trace.cycles) > self._cycles:
            self.player.stop()

    def step_comes_again(self, read: Read, step: str) -> None:
        """Of no account here."""

    def milestone_comes(self, read: Read, step: str) -> None:
        """Of no account here."""


_FAULTY = Path(__file__).parents[2] / "examples" / "faulty"


def test_bounds_of_the_worked_case_by_hand(tmp_path: Path) -> None:
    """Round 8..12, output 0.5..1, valve 18..28, stroke 380..450, filter 2..4, wait for a read 0..12; then back with
    25..40 and 300..360 (all ms, added by hand)."""
    drawn = chart(tmp_path, CLAMP)
    coil, valve, clamp, sensor = (row(drawn, name) for name in ("Y1", "V1", "clamp", "B2"))
    assert times(coil.edges[0]) == (8_500, 10_750, 13_000)
    assert [times(edge) for edge in valve.edges[:2]] == [(8_500, 10_750, 13_000), (26_500, 33_750, 41_000)]
    assert [times(edge) for edge in clamp.edges[:2]] == [(26_500, 33_750, 41_000), (406_500, 448_750, 491_000)]
    assert times(sensor.edges[0]) == (406_500, 448_750, 491_000)
    out, back = row(drawn, "main").bands
    assert out.begin is not None and out.end is not None and back.end is not None
    assert times(out.begin) == (0, 0, 0)
    assert times(out.end) == (408_500, 457_750, 507_000)
    assert times(back.end) == (408_500 + 335_500, drawn.end_us, 507_000 + 429_000)


def test_times_from_another_step(tmp_path: Path) -> None:
    """From entering the second step the first one began 408.5 to 507 ms before."""
    drawn = chart(tmp_path, CLAMP, Part(anchor="clamp-"))
    out, back = row(drawn, "main").bands
    assert out.begin is not None and back.begin is not None and back.end is not None
    assert times(out.begin) == (-507_000, -457_750, -408_500)
    assert times(back.begin) == (0, 0, 0)
    assert (back.end.earliest_us, back.end.latest_us) == (335_500, 429_000)
    assert "main.clamp-" in drawn.anchor


def test_an_unlimited_wait_leaves_the_latest_open_and_the_axis_typical(tmp_path: Path) -> None:
    drawn = chart(tmp_path, QUESTION)
    assert drawn.end_us < 2_000_000
    open_edges = [edge for _, edge in all_edges(drawn) if edge.latest_us is None]
    assert open_edges
    assert all(edge.earliest_us is not None for edge in open_edges)
    after = chart(tmp_path, QUESTION, Part(anchor="press"))
    press = next(band for band in row(after, "main").bands if band.name == "press")
    assert press.end is not None and times(press.end)[::2] == (200_000, 212_000)
    before = row(after, "Y1").edges[0]
    assert before.earliest_us is None and before.latest_us is not None


@pytest.mark.parametrize("name", ["clamp", "mixed", "sorter", "rinse_skid"])
def test_random_runs_keep_to_the_bounds(tmp_path: Path, name: str) -> None:
    """The same edge of the same row, in runs whose delays are drawn anywhere within their spans."""
    text = TEXTS.get(name) or _with_sheets(_FAULTY.parent / f"{name}.steps", tmp_path)
    report, studied = studied_text(tmp_path, text)
    machine = studied.machine
    drawn = chart_of(studied, report, Part())
    known = window_of(machine, studied.parts[0].studies, Part())
    settlement = known.study.settlement
    assert not report.counting
    for seed in range(25):
        source = random.Random(seed)

        def draw(what: str, name: str, number: int, span: Span, source: random.Random = source) -> int:
            greatest = min(span.greatest, span.least + 5_000_000)
            return source.choice((span.least, greatest, source.randint(span.least, greatest)))

        # The water is clear, and the piece is good.
        guide = Rounds(settlement.last + 1, -1 if name == "rinse_skid" else 0)
        player = guide.player = Player(machine, guide, draw, Placed(settlement.regions))
        study = Study(machine, settlement)
        study.trace = player.play()
        anchor, _ = anchor_of(study, study.trace.cycles[settlement.first])
        for played, line in zip(lines(study), lines(known.study), strict=True):
            edges = [
                (number, one)
                for number, one in enumerate(line.changes)
                if known.begin <= known.study.time(one.event) < known.end
            ]
            by_time = sorted(edges, key=lambda one: known.study.time(one[1].event))
            for (number, _), edge in zip(by_time, row(drawn, line.name).edges, strict=True):
                time = study.time(played.changes[number].event) - study.time(anchor)
                # Where a piston is stopped is not the same place in every run.
                assert played.changes[number].text.partition(" about")[0] == edge.text.partition(" about")[0]
                assert edge.earliest_us is None or edge.earliest_us <= time, (line.name, edge, time)
                assert edge.latest_us is None or time <= edge.latest_us, (line.name, edge, time)


@pytest.mark.parametrize("file", EXAMPLES, ids=lambda file: file.stem)
def test_every_example_has_a_sound_chart(file: Path, tmp_path: Path) -> None:
    drawn = chart(tmp_path, _with_sheets(file, tmp_path))
    for one, edge in all_edges(drawn):
        assert edge.drawn_from_us <= edge.typical_us <= edge.drawn_to_us, (one.name, edge)
        assert drawn.begin_us <= edge.typical_us <= drawn.end_us
    for one in drawn.rows:
        assert list(one.edges) == sorted(one.edges, key=lambda edge: edge.typical_us)
        if one.kind in (RowKind.COIL, RowKind.OUTPUT, RowKind.SENSOR):
            levels = [one.begin_level, *(edge.level for edge in one.edges)]
            assert all(before != after for before, after in pairwise(levels)), one.name
            assert one.end_level == levels[-1]


def _with_sheets(file: Path, folder: Path) -> str:
    for sheet in file.parent.glob("*.yaml"):
        (folder / sheet.name).write_bytes(sheet.read_bytes())
    return file.read_text("utf-8")


def test_rows_stand_in_the_order_of_the_machine(tmp_path: Path) -> None:
    names = [one.name for one in chart(tmp_path, MIXED).rows]
    lift = ["YL1", "YL2", "VL", "lift", "BL1", "BL2", "BL3"]
    stamp = ["YS1", "YS2", "VS", "stamp", "BS1", "BS2"]
    assert names == ["main", *lift, *stamp, "H1"]


def test_levels_of_valves_and_pistons(tmp_path: Path) -> None:
    drawn = chart(tmp_path, MIXED)
    out, stop, back = (MIDDLE, HIGH), (HIGH, MIDDLE), (MIDDLE, LOW, LOW, MIDDLE)
    assert tuple(edge.level for edge in row(drawn, "VL").edges) == (*out, *stop, *out, *stop, *back)
    lift = [edge.level for edge in row(drawn, "lift").edges]
    assert max(lift) == HIGH and 0 < lift[3] < HIGH
    stops = [edge for edge in row(drawn, "lift").edges if "stopped" in edge.text]
    assert len(stops) == 1 and 450_000 < stops[0].level < 600_000


def test_steps_that_run_together_lie_in_lanes(tmp_path: Path) -> None:
    bands = {band.name: band.lane for band in row(chart(tmp_path, MIXED), "main").bands}
    assert {bands["down"], bands["show"]} == {0, 1}
    assert bands["half"] == bands["full"] == 0


@pytest.mark.parametrize("text", [CLAMP, MIXED], ids=["clamp", "mixed"])
def test_further_cycles_repeat_the_first_with_wider_bounds(tmp_path: Path, text: str) -> None:
    one, three = chart(tmp_path, text), chart(tmp_path, text, Part(cycles=3))
    length = one.end_us - one.begin_us
    assert three.end_us - three.begin_us == 3 * length
    assert len(three.cycle_starts) == 4
    for first, all_three in zip(one.rows, three.rows, strict=True):
        count = len(first.edges)
        assert all_three.edges[:count] == first.edges
        for edge, later in zip(first.edges, all_three.edges[2 * count :], strict=True):
            assert (later.typical_us - edge.typical_us, later.text) == (2 * length, edge.text)
            assert later.latest_us is not None and edge.latest_us is not None
            assert later.latest_us - edge.latest_us > 2 * length


def test_further_cycles_know_where_a_stopped_piston_may_stand(tmp_path: Path) -> None:
    """A table that is stopped on its way may stand between several marks: from the start of its own cycle every event
    of the fourth cycle, which only the chart plays, has the bounds of the first settled one."""
    _, studied = studied_text(tmp_path, (_FAULTY / "overshoot.steps").read_text("utf-8"))
    settlement = studied.parts[0].studies[0].settlement
    assert settlement.regions
    window = window_of(studied.machine, studied.parts[0].studies, Part(cycles=4))
    study = window.study
    starts = study.trace.cycles[settlement.first : settlement.first + 5]
    bounds = []
    for start, end in (starts[0:2], starts[3:5]):
        events = [
            change.event
            for line in lines(study)
            for change in line.changes
            if study.time(start.event) <= study.time(change.event) < study.time(end.event)
        ]
        pairs = [(start.event, event) for event in events]
        rows = greatest_separations(study.trace.graph, both_ways(pairs))
        bounds.append([(rows[pair], rows[pair[::-1]]) for pair in pairs])
    assert bounds[0] == bounds[1] and len(bounds[0]) > 20


def test_a_part_from_step_to_step(tmp_path: Path) -> None:
    whole, part = chart(tmp_path, MIXED), chart(tmp_path, MIXED, Part(from_step="press", to_step="main.full"))
    bands = row(part, "main").bands
    assert [band.name for band in bands] == ["press", "lift", "press", "lift", "full"]
    assert part.begin_us == bands[0].begin.typical_us and part.end_us == bands[-1].end.typical_us  # type: ignore[union-attr]
    inside = [edge for edge in row(whole, "lift").edges if part.begin_us <= edge.typical_us < part.end_us]
    assert list(row(part, "lift").edges) == inside
    round_the_corner = chart(tmp_path, MIXED, Part(from_step="full", to_step="half"))
    names = [band.name for band in row(round_the_corner, "main").bands]
    assert names == ["full", "turn", "down", "show", "rest", "half"]


def test_chosen_rows_keep_their_bounds(tmp_path: Path) -> None:
    whole, part = chart(tmp_path, MIXED), chart(tmp_path, MIXED, Part(rows=("stamp", "main")))
    assert [one.name for one in part.rows] == ["main", "stamp"]
    assert part.rows == (row(whole, "main"), row(whole, "stamp"))
    assert {point.row for point in part.path} <= {0, 1}


@pytest.mark.parametrize(
    ("part", "words"),
    [
        (Part(from_step="pres"), "there is no step pres; did you mean press?"),
        (Part(anchor="nowhere_near"), "there is no step nowhere_near; the steps are main.half, main.press"),
        (Part(rows=("YL3",)), "there is no row YL3; did you mean YL2?"),
        (Part(choices=("main=1",)), "this text has nothing to choose"),
    ],
)
def test_what_is_not_there_is_refused_in_words(tmp_path: Path, part: Part, words: str) -> None:
    with pytest.raises(Unplaceable) as refusal:
        chart(tmp_path, MIXED, part)
    assert words in str(refusal.value)


@pytest.mark.parametrize(
    ("name", "where"),
    [
        ("short_pulse", "VS"),
        ("coil_handover", "VL"),
        ("cut_stroke", "pad"),
        ("missed_signal", "BM2"),
        ("tight_watchdog", "main"),
        ("dead_end", "main"),
        ("overshoot", "table"),
        ("broken_never", "drain"),
        ("over_limit", "BL2"),
        ("choice_race", "main"),
        ("command_race", "KF"),
    ],
)
def test_a_finding_lies_at_its_device(tmp_path: Path, name: str, where: str) -> None:
    drawn = chart(tmp_path, (_FAULTY / f"{name}.steps").read_text("utf-8"))
    mark = drawn.marks[0]
    assert mark.number == 1 and mark.finding.kind == name.replace("_", "-")
    assert mark.row is not None and drawn.rows[mark.row].name == where
    assert mark.time_us is not None and drawn.begin_us <= mark.time_us <= drawn.end_us
    edges = {edge.typical_us for _, edge in all_edges(drawn)}
    assert mark.time_us in edges or name == "missed_signal" or name == "tight_watchdog"


@pytest.mark.parametrize("name", ["clamp", "mixed", "question"])
def test_the_critical_path_is_as_long_as_the_longest_cycle(tmp_path: Path, name: str) -> None:
    report, studied = studied_text(tmp_path, TEXTS[name])
    drawn = chart_of(studied, report, Part())
    ((_, cycle),) = report.cycles
    assert drawn.path[0].latest_us == 0
    assert drawn.path[-1].latest_us == cycle.greatest
    typical = [point.typical_us for point in drawn.path]
    assert typical == sorted(typical)
    assert all(0 <= point.row < len(drawn.rows) for point in drawn.path)


def test_the_run_of_a_finding_has_no_spans(tmp_path: Path) -> None:
    """In the run that shows it the coil goes off before the valve is there, so that the shift is called off."""
    drawn = chart_of_finding(tmp_path, (_FAULTY / "short_pulse.steps").read_text("utf-8"), 1)
    assert drawn.run and all(edge.certain for _, edge in all_edges(drawn))
    (mark,) = drawn.marks
    assert mark.number == 1 and mark.time_us is not None
    valve = row(drawn, "VS")
    assert [edge.lasting for edge in valve.edges] == [True, False, False]
    assert valve.end_level == valve.begin_level == LOW
    assert mark.time_us - valve.edges[1].typical_us == 4_500
    with pytest.raises(Unplaceable, match="there is no finding 2; there are findings 1 to 1"):
        chart_of_finding(tmp_path, (_FAULTY / "short_pulse.steps").read_text("utf-8"), 2)
    with pytest.raises(Unplaceable, match="is not shown by a run"):
        chart_of_finding(tmp_path, (_FAULTY / "unused.steps").read_text("utf-8"), 1)


def test_what_is_behind_a_report_is_in_the_order_of_its_findings(tmp_path: Path) -> None:
    """So that the run of finding N is that of the N-th."""
    report, studied = studied_text(tmp_path, TEXTS["process"])
    assert len(report.findings) > 1
    assert [replace(one, source=None) for one in report.findings] == [one.finding for one in studied.broken]


def test_spans_do_not_push_the_part_shown_aside(tmp_path: Path) -> None:
    """Two sequences that never wait for one another: how they stand to each other is open by more than a cycle."""
    drawn = chart(tmp_path, (_FAULTY / "not_settled.steps").read_text("utf-8"))
    length = drawn.end_us - drawn.begin_us
    assert min(edge.drawn_from_us for edge in band_edges(row(drawn, "lamp"))) < drawn.begin_us - length
    begin, end = whole_time(drawn)
    assert begin == drawn.begin_us - length and end <= drawn.end_us + length
    assert "none is like another one" in drawn.title


def test_the_run_of_a_finding_that_needs_no_times(tmp_path: Path) -> None:
    """Nothing comes behind the step that waits for ever, and the mark stands in it."""
    drawn = chart_of_finding(tmp_path, (_FAULTY / "dead_end.steps").read_text("utf-8"), 1)
    (mark,) = drawn.marks
    assert drawn.run and mark.row is not None and drawn.rows[mark.row].name == "main"
    assert mark.time_us is not None and drawn.begin_us <= mark.time_us <= drawn.end_us
    (last,) = (band for band in row(drawn, "main").bands if band.name == "shut")
    assert last.end is None
