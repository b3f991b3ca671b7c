"""What newcomers write out of the habits of other notations, and what they meant.

Takes where the parser stopped; gives what would be right. Each table names the terminal whose place it is (a command in
a step is where ``UNTIL`` could stand), and the words met there.
"""

from __future__ import annotations

import re
from collections.abc import Mapping

from seqcheck.language.problems import short
from seqcheck.language.situation import Situation

_NUMBER = re.compile(r"\s*[0-9]")
_NAME = re.compile(r"\s*([^\W\d]\w*)")

_STORED = "write `on {name}`, or `set {name}` to store it"
_RELEASED = "write `reset {name}`; what a step has `on` drops when the step ends"
_DWELL = "write `dwell {time}`"
_UNTIL = "write `until {name}`"
_WITHIN = "write `within {time}`"
_IN_STEP = "it stands inside of a step: `step NAME {{ {word} .. }}`"
_REPEAT = "write `repeat 3 {{ .. }}`; a sequence begins again by itself"
_CHOOSE = "write `choose {{ when CONDITION {{ .. }} otherwise {{ .. }} }}`"
_TOGETHER = "write `together {{ .. }} and {{ .. }}`"
_OUT, _IN = "write `{name}+`", "write `{name}-`"
_EXTEND = "write `extend {time}` and `retract {time}`"
_SPRING, _BISTABLE = "write `spring`", "write `bistable`"
_OUTPUT, _SIGNAL = "write `output {name}`", "write `signal {name} from outside`"
_ALONE = 'each text stands alone; only times come from elsewhere, by `timing "FILE"`'


def _words(**advice: str) -> dict[str, str]:
    """``advice`` by words: ``wait_for="..."`` stands for the words wait and for."""
    return {word: said for words, said in advice.items() for word in words.split("_")}


_STEP = _words(
    wait_await_waitfor=_UNTIL,
    when_if_while=_UNTIL,
    for_delay_pause_sleep_hold_timer_time_after=_DWELL,
    timeout_max_watchdog_maximum=_WITHIN,
    off_release_deenergize_deenergise_clear_stop=_RELEASED,
    turn_switch_energize_energise_activate_start_open_close_enable=_STORED,
    goto_go_next="a step ends with its exit; `jump STEP` stands behind the step, or `within {time} else STEP` in it",
)
_ITEM = {
    **_words(
        dwell_until_on_set_reset_pulse=_IN_STEP,
        wait_await_delay_pause_sleep="write `step NAME {{ until CONDITION }}` or `step NAME {{ dwell 2 s }}`",
        goto_go="write `jump {name}`",
        loop_while_for_do=_REPEAT,
        parallel_par_simultaneous_simultaneously_fork=_TOGETHER,
        if_case_switch_select_when=_CHOOSE,
        extend_advance_out=_OUT,
        retract_return_in=_IN,
    ),
}
_RETURN = {
    **_words(
        monostable_single_return_springreturn=_SPRING,
        double_impulse_latching_latched_memory_pulse_bistabil=_BISTABLE,
        motorised_motorized_actuated="write `motor`",
        centre_center_mid="write which centre it is: `closed centre`, say",
    ),
}
_DRIVE = {"{": "the valve stands before the braces: `cylinder NAME on VALVE {{ .. }}`", "with": "write `on {name}`"}
_CYLINDER = _words(out_in_stroke_time_forward_back_travel=_EXTEND)
_STATEMENT = {
    **_words(
        program_procedure_function_prog="write `sequence {name} {{ .. }}`",
        import_include_use_from=_ALONE,
        cycle="write `limit cycle {time}`",
        motor_pump_lamp_contactor_relay_light=_OUTPUT,
        button_switch_input_pushbutton=_SIGNAL,
        plc_cpu="write `controller {{ .. }}`",
        actuator_piston_ram="write `cylinder {name} on VALVE {{ .. }}`",
        solenoid="a coil stands in the braces of its valve: `coil {name}`",
        moving_between_shifting_extended_retracted="write it behind a point: `{before}.{word}`",
        is_are="write what is asked behind a point: `A.moving`",
    ),
}
_WHEN = _words(if_case="write `when`", elif_elseif="write `when`", else_default="write `otherwise`")
_FOLLOWS = _words(outside_external="write `from outside`", input_button="write `from outside`")
_SCAN = _words(cycle_round_period_interval_time_plc="write `scan`, or `task` and `run`")
#: By the terminal that could stand at the slip, nearer ones first.
_PLACES: tuple[tuple[str, Mapping[str, str]], ...] = (
    ("SET", _STEP),
    ("WHEN", _WHEN),
    ("FOLLOWS", _FOLLOWS),
    ("SCAN", _SCAN),
    ("NORMALLY", _words(return_offset_centred="leave it out")),
    ("TOGETHER", _ITEM),
    ("BISTABLE", _RETURN),
    ("OUT", _DRIVE),
    ("EXTEND", _CYLINDER),
    ("VALVE", _STATEMENT),
)
#: ``and``, ``or``, ``not`` and a test of a value, as others write them.
_LOGIC = {
    **dict.fromkeys(("und", "et", "y"), "write `and`"),
    **dict.fromkeys(("oder", "ou", "o"), "write `or`"),
    **dict.fromkeys(
        ("is", "ist", "true", "high"), "leave it out: a name alone says that it is on, `not` that it is off"
    ),
}


def habit(at: Situation) -> str | None:
    """What would be right instead of a word that belongs to another notation; None where it is no such word."""
    if {"AND", "OR"} <= at.accepted and "VALVE" not in at.accepted and at.word.lower() in _LOGIC:
        return _LOGIC[at.word.lower()]
    for terminal, table in _PLACES:
        if terminal in at.accepted and at.word.lower() in table:
            return _filled(at, table[at.word.lower()])
    return None


def habit_of_item(at: Situation) -> str | None:
    """The same for a word between steps that the parser took for the name of a cylinder."""
    advice = _ITEM.get(at.word.lower())
    return None if advice is None else _filled(at, advice)


def _filled(at: Situation, advice: str) -> str:
    """The advice with the name or the time that follows the word, where one does."""
    if advice == _UNTIL and _NUMBER.match(at.ahead):
        advice = _DWELL
    ahead = at.ahead
    if advice in (_UNTIL, _STORED):
        ahead = re.sub(r"^\s*(for|until|on)(?!\w)", "", ahead)
    name = _NAME.match(ahead)
    time = re.match(r"\s*([0-9.]+ ?(?:us|ms|s|min))(?!\w)", at.ahead)
    before = re.search(r"([^\W\d]\w*)$", at.before)
    return advice.format(
        name=short(name[1]) if name else "NAME",
        time=time[1] if time else "200 ms",
        word=at.word,
        before=short(before[1]) if before else "NAME",
    )
