"""What a text says, before names are looked up. Plain immutable records, each with its place."""

from __future__ import annotations

from seqcheck.machine.devices import Stroke, ValveReturn
from seqcheck.machine.places import Place
from seqcheck.machine.records import record
from seqcheck.machine.time import Span


@record
class Word:
    """A name, a label or an address."""

    text: str
    place: Place


@record
class Marks:
    """What may stand behind a name."""

    label: Word | None
    address: Word | None


@record
class Edges:
    """``on SPAN off SPAN``; one span for both stands in both."""

    on: Span | None
    off: Span | None


#: What a setting holds: a span, a stroke, edges, or a share in millionths.
SettingValue = Span | Stroke | Edges | int


@record
class Setting:
    """One time of a device, from the text or from a sheet."""

    key: str
    value: SettingValue
    place: Place


Settings = tuple[Setting, ...]


# Conditions


@record
class TermText:
    """``start``, ``lift.extended``, ``main.clamp+2``, ``main.(clamp+ pusher-)``: what stands before the point, and the
    rest in its plain spelling. ``motion`` tells a motion step."""

    owner: Word | None
    name: Word
    motion: bool
    place: Place


@record
class NotText:
    part: ConditionText
    place: Place


@record
class AllText:
    parts: tuple[ConditionText, ...]
    place: Place


@record
class AnyText:
    parts: tuple[ConditionText, ...]
    place: Place


ConditionText = TermText | NotText | AllText | AnyText


# Devices


@record
class MachineText:
    name: str
    place: Place


@record
class TimingText:
    file: str
    place: Place


@record
class ControllerText:
    settings: Settings
    place: Place


@record
class IslandText:
    name: Word
    marks: Marks
    settings: Settings
    place: Place


@record
class CoilText:
    name: Word
    marks: Marks
    to: Word | None
    via: Word | None
    settings: Settings
    place: Place


@record
class ValveText:
    """``starts`` and ``normally`` are the words behind those words, None where they are left out."""

    name: Word
    marks: Marks
    ports: int
    positions: int
    size_place: Place
    kind: ValveReturn
    starts: Word | None
    normally: Word | None
    coils: tuple[CoilText, ...]
    settings: Settings
    place: Place


@record
class OutputText:
    name: Word
    marks: Marks
    via: Word | None
    settings: Settings
    place: Place


@record
class SensorText:
    name: Word
    marks: Marks
    low: int
    high: int
    range_place: Place
    via: Word | None
    settings: Settings
    place: Place


@record
class ConditionsText:
    """``out when .. in when ..``"""

    out: ConditionText
    back: ConditionText


@record
class CylinderText:
    """``drive`` is the name of a valve or conditions; ``starts`` is ``extended`` or ``retracted``, where written."""

    name: Word
    marks: Marks
    drive: Word | ConditionsText
    reverse: Word | None
    starts: Word | None
    settings: Settings
    sensors: tuple[SensorText, ...]
    place: Place


@record
class SignalText:
    """``follows`` is None for a signal from outside."""

    name: Word
    marks: Marks
    follows: ConditionText | None
    settings: Settings
    place: Place


@record
class FlagText:
    name: Word
    marks: Marks
    place: Place


# Sequences


@record
class CommandText:
    """``word`` is on, set, reset or pulse."""

    word: str
    target: Word
    duration: int | None
    place: Place


@record
class UntilText:
    condition: ConditionText
    steady: int | None
    place: Place


@record
class DwellText:
    time: int
    place: Place


@record
class WithinText:
    time: int
    otherwise: TermText | None
    place: Place


@record
class ExitText:
    """Every part at most once."""

    until: UntilText | None
    dwell: DwellText | None
    within: WithinText | None


@record
class StepText:
    name: Word
    marks: Marks
    commands: tuple[CommandText, ...]
    exit: ExitText
    place: Place


@record
class MoveText:
    cylinder: Word
    out: bool
    place: Place


@record
class MotionText:
    """``spelled`` is the plain spelling that the step is named by: ``clamp+``, ``(clamp+ pusher-)``."""

    spelled: str
    moves: tuple[MoveText, ...]
    exit: ExitText
    place: Place


@record
class EveryText:
    within: int
    place: Place


@record
class TogetherText:
    branches: tuple[tuple[ItemText, ...], ...]
    place: Place


@record
class ChoiceText:
    condition: ConditionText | None
    items: tuple[ItemText, ...]
    place: Place


@record
class ChooseText:
    choices: tuple[ChoiceText, ...]
    within: WithinText | None
    place: Place


@record
class RepeatText:
    times: int
    items: tuple[ItemText, ...]
    place: Place


@record
class JumpText:
    target: TermText
    place: Place


ItemText = EveryText | StepText | MotionText | TogetherText | ChooseText | RepeatText | JumpText


@record
class SequenceText:
    name: Word
    marks: Marks
    once: bool
    items: tuple[ItemText, ...]
    place: Place


# Rules


@record
class NeverText:
    condition: ConditionText
    tolerated: int
    why: str | None
    text: str
    place: Place


@record
class CycleLimitText:
    sequence: Word | None
    greatest: int
    text: str
    place: Place


@record
class PathLimitText:
    start: ConditionText
    end: ConditionText
    least: int | None
    greatest: int
    text: str
    place: Place


StatementText = (
    MachineText
    | TimingText
    | ControllerText
    | IslandText
    | ValveText
    | OutputText
    | CylinderText
    | SignalText
    | FlagText
    | SequenceText
    | NeverText
    | CycleLimitText
    | PathLimitText
)
