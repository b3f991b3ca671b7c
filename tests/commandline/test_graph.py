"""``graph``: its page, and GraphML and DOT read back by networkx and by pydot."""

from __future__ import annotations

import io
import warnings
from dataclasses import replace
from pathlib import Path

import networkx
import pydot
import pytest

from seqcheck.commandline import main
from seqcheck.engine.state_files import dot, graphml
from seqcheck.machine.findings import ChoiceTime, Duration, Report, State, StateRun
from seqcheck.pipeline import examine
from seqcheck.report.layout import WIDTH, page
from seqcheck.report.plain import plain_report
from seqcheck.report.state_forms import STATE_FORMS
from seqcheck.report.states import state_lines
from tests.commandline.conftest import Asked
from tests.report.samples import healthy, place, unreadable

Output = pytest.CaptureFixture[str]

CHECKOUT = Path(__file__).resolve().parents[2]
SKID = str(CHECKOUT / "examples/rinse_skid.steps")
UNSETTLED = str(CHECKOUT / "examples/faulty/not_settled.steps")
#: Letters that mean something to XML, to DOT or to a terminal; the last word is written from the right.
AWKWARD = 'a "b" <c> & d\\ e\\n {f|g} \u05d0\u05d1'


def awkward_report(name: str = AWKWARD) -> Report:
    return replace(
        healthy(),
        machine=name,
        states=(State(1, f"{name} begins", None), State(2, f"choose behind {name}", place(7))),
        runs=(
            StateRun(1, 2, None, Duration(1_000, 1_500, None)),
            StateRun(2, 1, f"when {name}", Duration(-2_500, 0, 4_000)),
            StateRun(2, 1, "otherwise in line 9", Duration(0, 1, 2)),
        ),
        choices=(ChoiceTime("main", place(8), f"when {name}", Duration(1_900_000, 1_900_000, None)),),
    )


Run = tuple[str, str, str | None, int, int | None]


def runs_of(report: Report) -> set[Run]:
    return {(str(r.begin), str(r.end), r.way, r.duration.least, r.duration.greatest) for r in report.runs}


def read_graphml(text: str) -> tuple[dict[str, str], set[Run], set[int]]:
    """Names of states, runs, and typical times."""
    graph = networkx.read_graphml(io.BytesIO(text.encode()), force_multigraph=True)
    runs = {
        (one, other, facts.get("way"), facts["least_us"], facts.get("greatest_us"))
        for one, other, facts in graph.edges(data=True)
    }
    return dict(graph.nodes(data="name")), runs, {facts["typical_us"] for *_, facts in graph.edges(data=True)}


def read_dot(text: str) -> tuple[str, dict[str, str], list[tuple[str, str, str]]]:
    """Its name, the labels of states, and those of runs."""
    with warnings.catch_warnings():
        # pydot 4.0 calls pyparsing by names that pyparsing 3.3 wants to drop.
        warnings.simplefilter("ignore", DeprecationWarning)
        (graph,) = pydot.graph_from_dot_data(text)
    names = {node.get_name(): unquoted(node.get("label")) for node in graph.get_nodes()}
    edges = [(one.get_source(), one.get_destination(), unquoted(one.get("label"))) for one in graph.get_edges()]
    return unquoted(graph.get_name()), names, edges


def unquoted(written: str) -> str:
    """A string of DOT as it is shown (Graphviz, *The DOT Language*, quoted strings and escString)."""
    assert written[0] == written[-1] == '"'
    return written[1:-1].replace('\\"', '"').replace("\\\\", "\\")


def dot_label(run: StateRun) -> str:
    times = f"{run.duration.least} us .. {'open' if run.duration.greatest is None else f'{run.duration.greatest} us'}"
    return times if run.way is None else f"{run.way}: {times}"


def held_against(report: Report) -> None:
    """Both files against the report, figure by figure."""
    names = {str(state.number): state.name for state in report.states}
    assert len(report.runs) == len(runs_of(report))
    read = read_graphml(STATE_FORMS["graphml"](report))
    assert read == (names, runs_of(report), {run.duration.typical for run in report.runs})
    title, labels, edges = read_dot(STATE_FORMS["dot"](report))
    assert title == report.machine
    assert labels == {number: f"{number}: {name}" for number, name in names.items()}
    assert sorted(edges) == sorted((str(run.begin), str(run.end), dot_label(run)) for run in report.runs)


@pytest.mark.parametrize("file", [SKID, UNSETTLED])
def test_files_hold_what_the_report_holds(file: str) -> None:
    report = examine(file)
    assert len(report.states) > 2
    held_against(report)


@pytest.mark.parametrize("name", [AWKWARD, '"', "\\", "<!-- -->", "]]>", "--", "\u202egnorw"])
def test_names_come_through_whatever_is_in_them(name: str) -> None:
    held_against(plain_report(awkward_report(name)))


def test_names_that_no_file_can_carry_are_made_plain_first(
    tmp_path: Path, capsysbinary: pytest.CaptureFixture[bytes]
) -> None:
    """The name of a machine that gives itself none is that of its file, which may hold anything."""
    text = tmp_path / 'wrong \x01 "way" <&\u202e.steps'
    text.write_text("sequence main { step a { dwell 1 s } }", encoding="utf-8")
    for form in ("graphml", "dot"):
        assert main(["graph", str(text), "--format", form]) == 0
    shown = capsysbinary.readouterr().out.decode("utf-8")
    assert "\x01" not in shown and "\u202e" not in shown
    written, _, drawn = shown.partition("</graphml>\n")
    assert read_graphml(f"{written}</graphml>")[0] == {"1": "main begins"}
    assert '"way" <&' in read_dot(drawn)[0]


def test_a_graph_without_runs_is_a_graph() -> None:
    held_against(replace(awkward_report(), states=(State(1, "main begins", None),), runs=()))


def test_the_same_graph_gives_the_same_bytes() -> None:
    report = awkward_report()
    for write in (lambda: graphml(report.states, report.runs), lambda: dot("x", report.states, report.runs)):
        assert write() == write()


def test_the_page_has_every_state_run_and_choice(capsys: Output) -> None:
    report = examine(SKID)
    assert main(["graph", SKID]) == 0
    shown = capsys.readouterr().out
    assert shown == page(state_lines(report)) == STATE_FORMS["text"](report)
    rows = [line.split(maxsplit=1) for line in shown.splitlines() if line]
    assert all([str(state.number), state.name] in rows for state in report.states)
    assert all(one.way in shown for one in report.choices)
    assert report.choices
    # By hand: `close_vent` dwells 1 s, and is left up to a round of 20 ms later.
    assert "5   7   1000.0   1010.0    1020.0  otherwise in line 29" in shown
    assert "Cycle times by choice (ms)" in shown and "not every run" not in shown and "below 0" not in shown


def test_parts_that_share_nothing_stand_side_by_side_in_one_graph(tmp_path: Path, capsys: Output) -> None:
    text = tmp_path / "apart.steps"
    lamp = "output H1\nsequence lamp { step lit { on H1  dwell 400 ms }  step dark { dwell 333 ms } }"
    clerk = "signal ask from outside\nsequence clerk { step idle { until ask }  step note { dwell 20 ms } }"
    text.write_text(f"sequence main {{ step a {{ dwell 1 s }} }}\n{lamp}\n{clerk}", encoding="utf-8")
    report = examine(str(text))
    held_against(report)
    assert [(one.number, one.name) for one in report.states] == [
        (1, "main begins"),
        (2, "lamp begins"),
        (3, "clerk begins"),
    ]
    assert [(one.begin, one.end, one.duration.typical) for one in report.runs] == [
        (1, 1, 1_000_000),
        (2, 2, 733_000),
        (3, 3, 20_000),
    ]
    assert main(["graph", str(text)]) == 0
    shown = capsys.readouterr().out
    assert "3 states, 3 runs" in shown and "not every run" not in shown


def test_a_graph_that_is_not_whole_says_so(capsys: Output) -> None:
    assert main(["graph", UNSETTLED]) == 0
    shown = " ".join(capsys.readouterr().out.split())
    assert "states, 48 runs, and not all that there are" in shown
    assert "But not every run was played" in shown
    assert "below 0: states of two sequences, of which either may come first" in shown
    for form, end in (("graphml", "-->"), ("dot", "these.")):
        assert main(["graph", UNSETTLED, "--format", form]) == 0
        last = capsys.readouterr().out.splitlines()[-1]
        assert "Not every run was played" in last and last.endswith(end)
        assert main(["graph", SKID, "--format", form]) == 0
        assert "Not every run" not in capsys.readouterr().out


def test_the_page_fits_whatever_the_names_are() -> None:
    lines = state_lines(awkward_report("x" * 200))
    assert all(len(line.text) <= WIDTH for line in lines)


def test_sheets_reach_the_examination(asked: Asked) -> None:
    assert main(["graph", "broken.steps", "--times", "a.yaml", "--assume", "air"]) == 0
    assert asked == [("broken.steps", ("assume:air", "a.yaml"))]


def test_each_form_goes_where_it_is_sent(tmp_path: Path, capsys: Output) -> None:
    names = {form: str(tmp_path / form) for form in STATE_FORMS}
    pairs = [word for form, name in names.items() for word in ("--format", form, "--output", name)]
    assert main(["graph", SKID, *pairs]) == 0
    assert capsys.readouterr().out == ""
    report = plain_report(examine(SKID))
    for form, name in names.items():
        assert Path(name).read_text(encoding="utf-8") == STATE_FORMS[form](report)


@pytest.mark.parametrize(
    ("arguments", "complaint"),
    [
        (["--output", "TEXT"], "--output would overwrite an input"),
        (["--format", "dot", "--format", "graphml"], "only one report can go to standard output"),
        (["--output", "FOLDER/none/x"], "cannot write the report to"),
    ],
)
def test_what_makes_no_sense_is_refused(arguments: list[str], complaint: str, tmp_path: Path, capsys: Output) -> None:
    text = tmp_path / "a.steps"
    text.write_text("sequence main { step a { dwell 1 s } }", encoding="utf-8")
    words = [word.replace("TEXT", str(text)).replace("FOLDER", str(tmp_path)) for word in arguments]
    assert main(["graph", str(text), *words]) == 2
    assert complaint in capsys.readouterr().err
    assert text.read_text(encoding="utf-8").startswith("sequence")


def test_an_unreadable_text_gives_no_graph(asked: Asked, tmp_path: Path, capsys: Output) -> None:
    """Its problems come on the page; a program that waits for a graph gets nothing, and people are told beside it."""
    assert main(["graph", "unreadable.steps"]) == 2
    assert capsys.readouterr().out == page(state_lines(unreadable()))
    for form in ("dot", "graphml"):
        assert main(["graph", "unreadable.steps", "--format", form]) == 2
        told = capsys.readouterr()
        assert told.out == "" and "error: there is no valve V9" in told.err
        file = tmp_path / form
        assert main(["graph", "unreadable.steps", "--format", form, "--output", str(file)]) == 2
        assert not file.exists()
