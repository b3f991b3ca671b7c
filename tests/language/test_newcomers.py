"""The slips that newcomers make, out of the habits of other notations: one table of message, advice and broken texts.

WORD stands for the word at the mark ¦, which is where the place of the message has to be. Every text is followed by
sound devices and a sound sequence: one slip gives one message.
"""

from __future__ import annotations

import re

import pytest

from tests.language.reading import DEVICES, WORK, problems, told

MARK = "¦"
#: Message, then for each advice the broken texts.
NEWCOMERS: dict[str, dict[str, list[str]]] = {
    "the `{` of line 1 is not closed before WORD": {
        "write `}` before it": [
            "sequence m { step a { on Y1 until a1 }\n¦flag x2",
            "sequence m { step a { until a1\n¦flag x2",
            "valve V9 5/2 spring { coil Y9 on 1 ms off 1 ms\n¦flag x2",
            "output L { on 5ms off 5 ms\n¦flag x2",
        ],
    },
    "there is no open `{` for this WORD": {
        "leave it out": [
            "sequence m { A+ A- } ¦}",
        ],
    },
    "WORD is no part of the language": {
        "leave it out": [
            "controller { scan ¦= 8..12 ms }",
            "valve V9 5/2 spring { coil ¦= Y9 on 1 ms off 1 ms }",
        ],
        "leave it out: a name alone says that it is on": [
            "sequence m { step a { on Y1 until a1 ¦= 1 } }",
            "sequence m { step a { on Y1 until a1 ¦== true } }",
        ],
        "leave it out: spaces and line ends separate": [
            "controller { scan¦: 8..12 ms }",
            "sequence m { step¦: a { until a1 } }",
            "sequence m { step a¦: { until a1 } }",
            'machine¦: "Press"',
            "valve V9¦: 5/2 spring { coil Y9 on 1 ms off 1 ms }",
            "controller { scan 8..12 ms¦; input 2 ms }",
            "sequence m { step a { until a1 }¦; A- }",
            "sequence m { A+¦; A- }",
            "sequence m { every step within 5 s¦; A+ A- }",
            "flag x ¦; rest",
            "controller { scan 8..12 ms¦, input 2 ms }",
            "sequence m { step a { until a1 }¦, A- }",
            "sequence m { A+¦, A- }",
            "sequence m { (A+¦, B+) A- B- }",
            "never A.moving¦, B.moving",
            "valve V9 5/2 spring { coil Y9¦, on 1 ms off 1 ms }",
            "cylinder Z on V1 { extend 1 s¦, retract 1 s }",
            "flag día¦, noche",
            "output L %Q0.1¦, on 5 ms",
        ],
        "leave it out; each command has a word of its own: `on Y1   on Y2`": [
            "sequence m { step a { on Y1¦, Y2 until a1 } }",
        ],
        "write `and`": [
            "sequence m { step a { until a1 ¦&& b1 } }",
            "sequence m { step a { until a1 ¦& b1 } }",
            "never A.moving ¦&& B.moving",
        ],
        "write `or`": [
            "sequence m { step a { until a1 ¦|| b1 } }",
        ],
        "leave it out: steps run in their order": [
            "sequence m { A+ ¦| B+ }",
            "sequence m { A+ ¦/ B- }",
            "sequence m { A+ ¦> A- }",
        ],
        "write `not`": [
            "sequence m { step a { until ¦!a1 } }",
        ],
    },
    "`;` is no part of the language": {
        "leave it out: spaces and line ends separate": [],
    },
    "WORD cannot stand here": {
        "write `{` before it": [
            "controller ¦scan 8..12 ms",
            "sequence m { step a ¦until a1 }",
            "sequence m { choose { when a1 ¦A+ } }",
            "sequence main ¦A+ A-",
            "io bus ¦update 2 ms",
        ],
        "write `scan`, or `task` and `run`": [
            "controller { ¦cycle 8..12 ms }",
        ],
        "write `on Y1`": [
            "sequence m { step a { ¦Y1 on until a1 } }",
            "sequence m { step a { ¦Y1 until a1 } }",
            "sequence m { step a { ¦Y1+ until a1 } }",
            "sequence m { step a { ¦Y1 = 1 until a1 } }",
            "sequence m { step a { ¦Y1 := TRUE until a1 } }",
            "sequence m { step schließen { ¦Y1 on until a0 } }",
        ],
        "write `until a1`": [
            "sequence m { step a { on Y1 ¦wait a1 } }",
            "sequence m { step a { on Y1 ¦wait until a1 } }",
            "sequence m { step a { on Y1 ¦wait for a1 } }",
            "sequence m {\n\tA+\n\tstep a { ¦wait a1 }\n}",
            "sequence m { step a { on Y1 ¦when a1 } }",
        ],
        "write `dwell 200 ms`": [
            "sequence m { step a { on Y1 ¦wait 200 ms } }",
            "sequence m { step a { on Y1 ¦for 200 ms } }",
            "sequence m { step a { on Y1 ¦delay 200 ms } }",
        ],
        "leave it out: a name alone says that it is on, `not` that it is off": [
            "sequence m { step a { on Y1 until a1 ¦is on } }",
        ],
        "write `dwell 200 ms`, or `pulse NAME 200 ms` instead of `on NAME`": [
            "sequence m { step a { on Y1 ¦200 ms } }",
        ],
        "write `reset Y1`; what a step has `on` drops when the step ends": [
            "sequence m { step a { ¦off Y1 until a0 } }",
        ],
        "write `on Y1`, or `set Y1` to store it": [
            "sequence m { step a { ¦turn on Y1 until a0 } }",
            "sequence m { step a { ¦open Y1 until a0 } }",
            "sequence m { step a { ¦energize Y1 until a0 } }",
        ],
        "each command has a word of its own: `on Y1   on Y2`": [
            "sequence m { step a { on Y1 ¦and Y2 until a1 } }",
        ],
        "write `on Y2`": [
            "sequence m { step a { on Y1 ¦Y2 until a1 } }",
        ],
        "write `from` before it": [
            "limit ¦Y2 to b1 1 s",
        ],
        "did you mean `and`?": [
            "sequence m { step a { until a1 ¦AND b1 } }",
        ],
        "did you mean `or`?": [
            "sequence m { step a { until a1 ¦OR b1 } }",
        ],
        "write `and`": [
            "sequence m { step a { until a1 ¦und b1 } }",
            "sequence m { step a { until a1 ¦y b1 } }",
        ],
        "here may stand: a name, not": [
            "sequence m { step a { until ¦} }",
        ],
        "here may stand: a number": [
            "sequence m { step a { on Y1 until a1 steady ¦} }",
        ],
        "write `within 5 s`": [
            "sequence m { step a { ¦timeout 5 s until a1 } }",
            "sequence m { step a { until a1 ¦timeout 5 s } }",
            "sequence m { step a { until a1 ¦max 5 s } }",
        ],
        "leave it out: `repeat 3 { .. }`": [
            "sequence m { repeat 3 ¦times { A+ A- } }",
        ],
        "write `repeat 3 { .. }`": [
            "sequence m { ¦3 { A+ A- } }",
        ],
        "write `and` before it": [
            "sequence m { together { A+ } ¦{ B+ } }",
        ],
        "write `centre` before it": [
            "valve V9 5/3 closed ¦{ coil Y8 to a coil Y9 to b on 1 ms off 1 ms }",
        ],
        "the valve stands before the braces: `cylinder NAME on VALVE { .. }`": [
            "cylinder Z ¦{ on V1 extend 1 s retract 1 s }",
        ],
        "write `when`": [
            "sequence m { choose { ¦if a1 { A+ } } }",
        ],
        "write `otherwise`": [
            "sequence m { choose { when a1 { A+ } ¦else { B+ } } }",
            "sequence m { choose { when a1 { A+ } ¦else { A- } } }",
        ],
        "did you mean `a`?": [
            "valve V9 5/3 closed center { coil Y8 to ¦A coil Y9 to b on 1 ms off 1 ms }",
        ],
        "write `to` before it": [
            "limit from Y2 ¦b1 1 s",
        ],
        "write `cycle` before it: `limit cycle main ..`": [
            "limit ¦main 16 s",
        ],
        'write it in quotes: "Press"': [
            "machine ¦Press",
        ],
        'write it in quotes: "press.yaml"': [
            "timing ¦press.yaml",
        ],
        "write `spring`": [
            "valve V9 5/2 ¦monostable { coil Y9 on 1 ms off 1 ms }",
            "valve V9 5/2 ¦single { coil Y9 on 1 ms off 1 ms }",
        ],
        "write `coil Y9`": [
            "valve V9 5/2 spring { ¦Y9 on 1 ms off 1 ms }",
        ],
        "write which centre it is: `closed centre`, say": [
            "valve V9 5/3 ¦centre closed { coil Y8 to a coil Y9 to b on 1 ms off 1 ms }",
        ],
        "write `on V1`": [
            "cylinder Z ¦V1 { extend 1 s retract 1 s }",
        ],
        "write `extend 1 s` and `retract 1 s`": [
            "cylinder Z on V1 { ¦out 1 s in 1 s }",
            "cylinder Z on V1 { ¦stroke 1 s }",
        ],
        "write `at` before it": [
            "cylinder Z on V1 { extend 1 s retract 1 s sensor q ¦retracted }",
        ],
        "a sensor has a name: `sensor B1 at retracted`": [
            "cylinder Z on V1 { extend 1 s retract 1 s sensor at ¦retracted }",
        ],
        "write `retracted`, `extended` or a range such as 45..50 %": [
            "cylinder Z on V1 { extend 1 s retract 1 s sensor q at ¦home }",
        ],
        "write `from outside`": [
            "signal s ¦outside",
        ],
        "write `after` before it": [
            "signal s from outside ¦5 s",
        ],
        "did you mean `follows`?": [
            "signal s ¦follow A.extended",
        ],
        "write `or`": [
            "sequence m { step a { until a1 ¦oder b1 } }",
        ],
    },
    "the unit is left out": {
        "write 8..12 ms (or us, s, min)": [
            "controller { scan ¦8..12 }",
        ],
        "write 12 ms (or us, s, min)": [
            "controller { scan 8ms..¦12 }",
        ],
        "write 2 ms (or us, s, min)": [
            "controller { scan 10 ms ± ¦2 }",
        ],
    },
    "a span is not written with WORD": {
        "write 8..12 ms, say": [
            "controller { scan 8¦-12 ms }",
            "controller { scan 8 ¦- 12 ms }",
            "controller { scan 8 ¦to 12 ms }",
            "controller { scan 8 ¦bis 12 ms }",
            "controller { scan 8¦:12 ms }",
            "controller { scan 8¦/12 ms }",
        ],
        "write 45..50 %, say": [
            "cylinder Z on V1 { extend 1 s retract 1 s sensor q at 45¦-50 % }",
        ],
        "write 380..450 ms, say": [
            "controller { scan 380¦-450 ms }",
        ],
    },
    "WORD is no unit": {
        "write ms": [
            "controller { scan 8..12 ¦millis }",
            "controller { scan 8..12 ¦msec }",
            "controller { scan 8..12 ¦MS }",
            "controller { scan 8..12 ¦Ms }",
        ],
        "write us": [
            "controller { scan 8..12 ¦µs }",
        ],
        "write us, ms, s or min": [
            "controller { scan 0.5 ¦h }",
        ],
        "write s": [
            "cylinder Z on V1 { extend 1..2 ¦sek retract 1 s }",
        ],
    },
    "a comma in a number": {
        "write a decimal point: 8.5": [
            "controller { scan 8¦,5..12 ms }",
        ],
        "write a decimal point: 8..12.5": [
            "controller { scan 8..12¦,5 ms }",
        ],
    },
    "this span runs backwards": {
        "write the least time first": [
            "controller { scan ¦12..8 ms }",
        ],
    },
    "a tolerance is not written with `+/-`": {
        "write 30 ± 5 ms, or 30 +- 5 ms": [
            "controller { scan 10ms ¦+/- 2ms }",
        ],
    },
    "a tolerance of a time is a time": {
        "write 30 ± 5 ms, say": [
            "controller { scan 10 ms ± 20 ¦% }",
        ],
    },
    "WORD cannot stand before a number": {
        "write the time alone, or the least and the most: 8..12 ms": [
            "controller { scan ¦~10 ms }",
            "controller { scan ¦max 12 ms }",
            "limit from Y2 to b1 ¦max 1 s",
            "controller { scan ¦<12 ms }",
            "limit from Y2 to b1 ¦< 1 s",
            "limit cycle ¦< 16 s",
            "controller { scan ¦(8..12 ms) }",
            "controller { scan ¦[8..12] ms }",
        ],
    },
    "a time does not stand in quotes": {
        "leave the quotes out": [
            'controller { scan ¦"8..12 ms" }',
        ],
    },
    "WORD switches nothing": {
        "write `on Y1`": [
            "sequence m { step a { ¦+Y1 until a1 } }",
        ],
    },
    "`on` is a command and needs a name": {
        "leave it out: in a condition a name alone says that it is on": [
            "sequence m { step a { on Y1 until a1 on ¦} }",
        ],
    },
    "WORD cannot stand behind the name `NOT`": {
        "write `not` in small letters before it": [
            "sequence m { step a { until NOT ¦a1 } }",
        ],
    },
    "this `step` has no name": {
        "write `step NAME {`": [
            "sequence m { step ¦{ until a1 } }",
        ],
    },
    "a name cannot begin with a digit": {
        "begin it with a letter": [
            "sequence m { step ¦1 { until a1 } }",
            'sequence m { step ¦10 "raise" { until a1 } }',
            "output ¦1L",
        ],
    },
    'a text in "quotes" cannot stand here': {
        "a name goes before it": [
            'sequence m { step ¦"raise" { until a1 } }',
            'sequence ¦"main" { A+ A- }',
        ],
    },
    "a name has no hyphen": {
        "write a_b": [
            "sequence m { step a¦-b { until a1 } }",
        ],
        "write Y_9": [
            "valve V9 5/2 spring { coil Y¦-9 on 1 ms off 1 ms }",
        ],
    },
    "WORD stands behind a name, not before it": {
        "write `A+` for a cylinder; a coil is switched in a step, by `on` or `reset`": [
            "sequence m { ¦+A -A }",
        ],
        "write `Y1-` for a cylinder; a coil is switched in a step, by `on` or `reset`": [
            "sequence m { ¦-Y1 }",
        ],
    },
    "`->` is no part of the language": {
        "leave it out: steps run in their order": [
            "sequence m { A+ ¦-> A- }",
        ],
    },
    "WORD begins no step": {
        "a cylinder moves by A+ or A-, other steps begin with `step`": [
            "sequence m { ¦A }",
        ],
        "write `A+`": [
            "sequence m { ¦A out }",
            "sequence m { ¦extend A }",
        ],
        "write `step NAME { until CONDITION }` or `step NAME { dwell 2 s }`": [
            "sequence m { ¦wait 2 s }",
        ],
        "it stands inside of a step: `step NAME { dwell .. }`": [
            "sequence m { ¦dwell 2 s }",
        ],
        "it stands inside of a step: `step NAME { until .. }`": [
            "sequence m { ¦until a1 }",
        ],
        "it stands inside of a step: `step NAME { on .. }`": [
            "sequence m { ¦on Y1 }",
        ],
        "write `jump A`": [
            "sequence m { ¦goto A+ }",
        ],
        "write `repeat 3 { .. }`; a sequence begins again by itself": [
            "sequence m { ¦loop { A+ A- } }",
        ],
        "write `together { .. } and { .. }`": [
            "sequence m { ¦parallel { A+ } and { B+ } }",
        ],
        "write `choose { when CONDITION { .. } otherwise { .. } }`": [
            "sequence m { ¦if a1 { A+ } else { B+ } }",
        ],
    },
    "a second sign behind A+": {
        "leave it out": [
            "sequence m { A+¦+ }",
        ],
    },
    "a parenthesis is not closed": {
        "write `)` before the `}`": [
            "sequence m { (A+ B+ A- ¦}",
        ],
    },
    "nobody says how often this is repeated": {
        "write `repeat 3 {`, say": [
            "sequence m { repeat ¦{ A+ A- } }",
        ],
    },
    "a `together` has two branches or more": {
        "write `together { .. } and { .. }`": [
            "sequence m { together { A+ B+ } ¦}",
        ],
    },
    "this `sequence` has no name": {
        "write `sequence NAME {`": [
            "sequence ¦{ A+ A- }",
        ],
    },
    "WORD begins no statement": {
        "write `sequence main { .. }`": [
            "¦main { A+ A- }",
            "¦program main { A+ A- }",
        ],
        "write `limit cycle 16 s`": [
            "¦cycle 16 s",
        ],
        "write it behind a point: `A.moving`": [
            "never A ¦moving and B.moving",
        ],
        "write what is asked behind a point: `A.moving`": [
            "never A ¦is moving",
        ],
        'it stands before the reason: `never CONDITION for 5 ms "why"`': [
            'never A.moving "why" ¦for 5 ms',
        ],
        "a statement begins with one of: "
        "machine, timing, controller, io, valve, output, cylinder, signal, flag, sequence, never, limit": [
            "¦A // b",
        ],
        "leave it out": [
            "valve V9 5/2 spring ¦return { coil Y9 on 1 ms off 1 ms }",
        ],
        "did you mean `valve`?": [
            "¦Valve V9 5/2 spring { coil Y9 on 1 ms off 1 ms }",
            "¦VALVE V9 5/2 spring { coil Y9 on 1 ms off 1 ms }",
            "¦valves { V9 5/2 spring }",
        ],
        'each text stands alone; only times come from elsewhere, by `timing "FILE"`': [
            '¦import "x"',
            '¦include "x"',
        ],
    },
    "the statement before `sequence` ends too early": {
        "here may stand: a number": [
            "limit from Y2 to b1¦",
        ],
        "write `)` before it": [
            "never (A.moving and B.moving¦",
        ],
        "here may stand: follows, from": [
            "signal s¦",
            "signal s¦",
        ],
    },
    "a comment begins with `#`": {
        "write `# ..`, up to the end of the line": [
            "¦// a comment",
            "¦/* a comment */",
            "¦(* a comment *)",
            "¦-- a comment",
            "¦; a comment",
            "¦' a comment",
            "flag x ¦// a comment",
            "flag x ¦(* a comment *)",
            "flag x ¦/* a comment */",
            "flag x ¦-- comment",
            "flag x\r\nflag größe ¦// zu groß\r\n",
        ],
    },
    'quotes are written `"`, not WORD': {
        'write "Press"': [
            "machine ¦“Press”",
            "machine ¦'Press'",
        ],
        'write "lamp"': [
            "output L ¦“lamp”",
            "output L ¦‘lamp’",
        ],
        'write "press.yaml"': [
            "timing ¦'press.yaml'",
        ],
    },
    "these quotes are not closed": {
        'write `"` at the end of the text, on the same line': [
            'machine ¦"Press',
            'output L ¦"lamp',
        ],
    },
    "ports and positions are written with `/`": {
        "write 5/2": [
            "valve V9 ¦5-2 spring { coil Y9 on 1 ms off 1 ms }",
            "valve V9 ¦52 spring { coil Y9 on 1 ms off 1 ms }",
        ],
    },
    "the valve's ports and positions are left out": {
        "write 5/2, say, behind its name": [
            "valve V9 ¦spring { coil Y9 on 1 ms off 1 ms }",
        ],
    },
    "nobody says where this valve goes without current": {
        "write `spring` or `bistable`, say, before the `{`": [
            "valve V9 5/2 ¦{ coil Y9 on 1 ms off 1 ms }",
        ],
    },
    "WORD stands outside of the braces": {
        "write `{` before it and `}` behind all that belongs in": [
            "valve V9 5/2 spring ¦coil Y9",
            "cylinder Z on V1 ¦extend 1 s retract 1 s",
            "output L ¦on 5 ms",
        ],
    },
    "an arrow is no part of the language": {
        "write `to` instead": [
            "valve V9 5/3 closed center { coil Y8 ¦-> a coil Y9 to b on 1 ms off 1 ms }",
        ],
    },
    "this valve has no name": {
        "write `valve V1 5/2`, say": [
            "valve ¦5/2 spring { coil Y9 on 1 ms off 1 ms }",
        ],
    },
    "this `on` has no name": {
        "write `on NAME {`": [
            "cylinder Z on ¦{ extend 1 s retract 1 s }",
        ],
    },
    "a sensor covers a range of the stroke": {
        "write 45..50 %, say": [
            "cylinder Z on V1 { extend 1 s retract 1 s sensor q at 50% ¦}",
            "cylinder Z on V1 { extend 1 s retract 1 s sensor q at 45 % ¦}",
        ],
    },
    "the `%` is left out": {
        "write it behind the number": [
            "cylinder Z on V1 { extend 1 s retract 1 s sensor q at 45..50 ¦}",
            "cylinder Z on V1 { extend 1 s retract 1 s uneven 10 ¦}",
        ],
    },
    "WORD is no address": {
        "an address begins with `%`: %Q0.., say": [
            "output L ¦Q0.1",
        ],
    },
    "a comma in an address": {
        "write a point: %Q0.1, say": [
            "output L %Q0¦,1",
        ],
    },
    "WORD stands outside of a valve": {
        "is there a `}` too many before it?": [
            "¦coil Y9",
        ],
    },
    "WORD stands outside of a cylinder": {
        "is there a `}` too many before it?": [
            "¦sensor q at retracted",
        ],
    },
    "WORD stands outside of a sequence": {
        "is there a `}` too many before it?": [
            "¦step a { until a1 }",
        ],
    },
}
CASES = [
    pytest.param(message, advice, text, id=text[:60])
    for message, by_advice in NEWCOMERS.items()
    for advice, texts in by_advice.items()
    for text in texts
]


@pytest.mark.parametrize(("message", "advice", "marked"), CASES)
def test_a_slip_of_a_newcomer_gets_the_one_right_sentence(message: str, advice: str, marked: str) -> None:
    before, _, behind = marked.partition(MARK)
    text = before + behind
    word = re.match(r"\w+|.", behind)
    found = problems(text + "\n" + ("" if "sequence" in text else WORK) + DEVICES)
    assert len(found) == 1, told(found)
    assert found[0].message == message.replace("WORD", f"`{word[0]}`" if word else "")
    assert found[0].advice == advice
    assert (found[0].place.line, found[0].place.column) == (
        before.count("\n") + 1,
        len(before) - (before.rfind("\n") + 1) + 1,
    )
    assert found[0].source == text.split("\n")[found[0].place.line - 1].rstrip("\r")


def test_the_table_has_more_than_the_fifty_likeliest() -> None:
    assert len(CASES) > 200
    assert len(NEWCOMERS) > 45
