"""Charts of small machines for the tests, made as the command makes them."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

from seqcheck.chart.asked import Part
from seqcheck.chart.build import chart_of, chart_of_run
from seqcheck.chart.model import Chart, Edge, Row, RowKind
from seqcheck.chart.view import edges_of_bands
from seqcheck.machine.findings import Report
from seqcheck.pipeline import Studied, study

#: The worked case of the design, less its lift: round 8..12, input 2..4, output 0.5..1 ms.
CLAMP = """
machine "Clamp"
controller { scan 8..12 ms  input 2..4 ms  output 0.5..1 ms }
valve V1 5/2 spring { coil Y1 %Q0.0  on 18..28 ms  off 25..40 ms }
cylinder clamp "crate clamp" on V1 {
    extend 380..450 ms  retract 300..360 ms  sensor B1 %I0.0 at retracted  sensor B2 %I0.1 at extended
}
sequence main { every step within 2 s  clamp+  clamp- }
"""

#: A wait that nothing limits in the middle of the cycle.
QUESTION = """
machine "Gate with a question"
controller { scan 8..12 ms  input 2..4 ms  output 0.5..1 ms }
valve V1 5/2 spring { coil Y1  on 18..28 ms  off 25..40 ms }
cylinder gate on V1 { extend 380..450 ms  retract 300..360 ms  sensor B1 at retracted  sensor B2 at extended }
signal part "part in place" from outside
sequence main { every step within 2 s  gate+  step look { until part }  step press { dwell 200 ms }  gate- }
"""

#: Names in letters from the right; labels that would end an element, an attribute, a comment or a CDATA section.
HOSTILE = """
machine "<b>&amp; ]]> </svg></title><script>alert(1)</script> 'x' מכונה"
controller { scan 8..12 ms  input 2..4 ms  output 0.5..1 ms }
valve שסתום "<img src=a onerror=alert(1)>" 5/2 spring {
    coil סליל %Q0.0 "]]> & 'one' </svg> $end"  on 18..28 ms  off 25..40 ms
}
cylinder גליל "<a href='javascript:alert(1)'>" on שסתום {
    extend 380..450 ms  retract 300..360 ms
    sensor חיישן1 %I0.0 "&lt;not a tag&gt;" at retracted  sensor חיישן2 %I0.1 "=a & b < c > d" at extended
}
sequence סדרה {
    step קדימה "</text><!--" { pulse סליל 20 ms  until חיישן2 }
    step אחורה "--><style>*{display:none}</style>" { reset סליל  until חיישן1 }
}
"""

#: A centred valve whose cylinder is stopped between its ends, and pulses on a bistable valve.
MIXED = """
machine "Lift and stamp"
controller { scan 4..6 ms  input 1..3 ms  output 0.5..1 ms }
valve VL 5/3 closed centre { coil YL1 to a  coil YL2 to b  on 20..30 ms  off 30..45 ms }
valve VS 5/2 bistable      { coil YS1 to a  coil YS2 to b  on 12..20 ms }
output H1 "lamp"
cylinder lift on VL {
    extend 900..1100 ms  retract 800..950 ms  lag 10..30 ms  overrun 5..20 ms
    sensor BL1 at retracted  sensor BL2 at 45..60 %  sensor BL3 at extended
}
cylinder stamp on VS { extend 90..130 ms  retract 80..120 ms  sensor BS1 at retracted  sensor BS2 at extended }
sequence main {
    every step within 3 s
    step half { on YL1  until BL2 }
    repeat 2 {
        step press { pulse YS1 40 ms  until BS2 }
        step lift { pulse YS2 40 ms  until BS1 }
    }
    step full { on YL1  until BL3 }
    step turn { dwell 60 ms }
    together { step down { on YL2  until BL1 } } and { step show { on H1  dwell 300 ms } }
    step rest { dwell 60 ms }
}
"""

#: An ideal controller, dwells and a flag: every time can be added up by hand. A spoilt piece is looked at again.
SORTER = """
machine "Sorter"
output K1 %Q0.0 "keep"
output K2
signal good %I0.0 from outside
flag told "clerk knows"
sequence main {
    step load { dwell 20 ms }
    step look { dwell 100 ms }
    choose {
        when good { step keep { on K1  dwell 200 ms } }
        otherwise { step rest { dwell 50 ms }  jump look }
    }
    step tell { set told  until clerk.wipe }
}
sequence clerk {
    step idle { until told }
    step note { on K2  dwell 30 ms }
    step wipe { reset told  dwell 40 ms }
}
"""
#: The line of its choose.
SORTING = 10

#: A motor valve that is stopped on its way, a tap that is normally open, and a gate that two valves hold.
PROCESS = """
machine "Vessel"
valve VM "inlet" 2/2 motor { coil M1 to a  coil M2 to b  travel 1 s }
valve VT "vent" 2/2 spring normally open { coil Y2  on 40 ms  off 60 ms }
valve V1 3/2 spring { coil Y1  on 20 ms  off 30 ms }
valve V2 3/2 spring { coil Y3  on 20 ms  off 30 ms }
cylinder gate out when V1.a and V2.a in when not V1.a and not V2.a {
    extend 200 ms  retract 150 ms  sensor B1 at retracted  sensor B2 at extended
}
signal flow %I0.7 follows VM.open on 300 ms off 100 ms
sequence main {
    step crack { on M1  dwell 400 ms }
    step wait  { dwell 200 ms }
    step more  { on M1  on Y2  dwell 1.5 s }
    step shut  { on M2  set Y1  dwell 1.2 s }
    step out   { set Y3  until B2  within 1 s }
    step back  { reset Y1  reset Y3  until B1 and not flow  within 1 s }
}
never VM.open and not VT.open "the vessel must breathe"
"""

TEXTS = {"clamp": CLAMP, "question": QUESTION, "hostile": HOSTILE, "mixed": MIXED, "sorter": SORTER, "process": PROCESS}
EXAMPLES = sorted((Path(__file__).parents[2] / "examples").rglob("*.steps"))


def studied_text(folder: Path, text: str) -> tuple[Report, Studied]:
    file = folder / "sample.steps"
    file.write_text(text, "utf-8")
    report, studied = study(str(file))
    assert studied is not None, report.problems
    return report, studied


def chart(folder: Path, text: str, part: Part | None = None) -> Chart:
    report, studied = studied_text(folder, text)
    return chart_of(studied, report, part or Part())


def chart_of_finding(folder: Path, text: str, number: int) -> Chart:
    report, studied = studied_text(folder, text)
    return chart_of_run(studied, report, Part(), number)


def row(chart: Chart, name: str) -> Row:
    return next(row for row in chart.rows if row.name == name)


def edges_of(row: Row) -> tuple[Edge, ...]:
    """All of a row; of steps those once that several share."""
    return edges_of_bands(row.bands) if row.kind is RowKind.STEPS else row.edges


def all_edges(chart: Chart) -> Iterator[tuple[Row, Edge]]:
    for one in chart.rows:
        yield from ((one, edge) for edge in edges_of(one))


def band_edges(row: Row) -> Iterator[Edge]:
    """Of steps and choices, as they are drawn."""
    for band in row.bands:
        yield from (edge for edge in (band.begin, band.end) if edge is not None)
    yield from (decision.edge for decision in row.decisions)


def times(edge: Edge) -> tuple[int | None, int, int | None]:
    return edge.earliest_us, edge.typical_us, edge.latest_us
