"""HTML reports of real texts for the tests: read, examined, charted and written as the command does it."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from seqcheck.chart.asked import Part
from seqcheck.chart.build import chart_of
from seqcheck.chart.model import Chart
from seqcheck.chart.page import html_page
from seqcheck.chart.page_imprint import Imprint
from seqcheck.chart.page_moves import MoveTimes, move_times
from seqcheck.language.source import Source, read_source
from seqcheck.machine.findings import Report
from seqcheck.machine.model import Machine
from seqcheck.pipeline import study_source
from tests.bench.stations import in_a_row

EXAMPLES = sorted(
    file.relative_to(Path(__file__).parents[2] / "examples").as_posix()
    for file in (Path(__file__).parents[2] / "examples").rglob("*.steps")
)
IMPRINT = Imprint(date="2031-03-07", revision="C")

#: Written by hand, so that the figures of its moves can be too: see ``test_page_moves``.
TWO_MOVES = """
machine "Gate"
controller { scan 8..12 ms  input 2..4 ms  output 0.5..1 ms }
valve V1 5/2 spring { coil Y1 %Q0.0 "gate up"  on 18..28 ms  off 25..40 ms }
valve V2 5/3 closed centre { coil Y2 to a  coil Y3 to b  on 20..30 ms  off 30..45 ms  gap 15 ms }
cylinder gate "the gate" on V1 {
    extend 380..450 ms  retract 300..360 ms  sensor B1 %I0.0 at retracted  sensor B2 %I0.1 "gate is up" at extended
}
cylinder ram on V2 { extend 600..700 ms  retract 500..620 ms  sensor B3 at retracted }
signal start from outside
sequence main {
    step ready { until start }
    gate+ within 1 s
    step push "push it in" { on Y2  dwell 900 ms }
    step rest { dwell 100 ms }
    step pull { on Y3  until B3  within 2 s }
    gate-
}
"""

#: Every name in letters from the right; labels that would end an element, an attribute, a style or a CDATA section.
HOSTILE = """
machine "<b>&amp; ]]> </style></title><script>alert(1)</script> 'x' מכונה"
controller { scan 8..12 ms  input 2..4 ms  output 0.5..1 ms }
valve שסתום "<img src=http://127.0.0.1/a.png onerror=alert(1)>" 5/2 spring {
    coil סליל %Q0.0 "]]> & 'one' </svg>"  on 18..28 ms  off 25..40 ms
}
cylinder גליל "<a href='javascript:alert(1)'>" on שסתום {
    extend 380..450 ms  retract 300..360 ms
    sensor חיישן1 %I0.0 "&lt;not a tag&gt;" at retracted  sensor חיישן2 %I0.1 "a & b < c > d" at extended
}
sequence סדרה {
    step קדימה "</td></tr></table><!--" { pulse סליל 20 ms  until חיישן2 }
    step אחורה "--><style>*{display:none}</style>" { reset סליל  until חיישן1 }
}
"""

#: 30 cylinders and 60 steps.
LARGE = 'machine "Fifteen stations"\n' + in_a_row(60, 15)


@dataclass(frozen=True, slots=True)
class Sample:
    report: Report
    machine: Machine | None
    charts: tuple[Chart, ...]
    moves: MoveTimes

    def page(self, imprint: Imprint = IMPRINT) -> str:
        return html_page(self.report, self.machine, self.charts, self.moves, imprint)


def sample(text: str, name: str = "sample.steps") -> Sample:
    return _sample(Source(name, text))


def example(name: str) -> Sample:
    source = read_source(str(Path(__file__).parents[2] / "examples" / name))
    assert isinstance(source, Source)
    return _sample(source)


def _sample(source: Source) -> Sample:
    report, studied = study_source(source)
    if studied is None:
        return Sample(report, None, (), ())
    charts = (chart_of(studied, report, Part()),)
    return Sample(report, studied.machine, charts, move_times(studied.machine, studied.studies))
