"""Every finding kind, in one explicit tuple. A new kind is a file of its own and a line here."""

from __future__ import annotations

from seqcheck.checks import (
    assumed_times,
    broken_never,
    choice_race,
    command_race,
    cut_stroke,
    early_dwell,
    missed_signal,
    not_settled,
    over_limit,
    overshoot,
    short_pulse,
    stale_accept,
    stale_signal,
    tight_watchdog,
)
from seqcheck.checks.check import Check
from seqcheck.checks.coverage import NO_WATCHDOG, UNREACHABLE, UNUSED
from seqcheck.checks.opposed_coils import COIL_HANDOVER, OPPOSED_COILS
from seqcheck.checks.standstill import DEAD_END, ENDLESS_LOOP

CHECKS: tuple[Check, ...] = (
    OPPOSED_COILS,
    COIL_HANDOVER,
    short_pulse.CHECK,
    cut_stroke.CHECK,
    early_dwell.CHECK,
    overshoot.CHECK,
    stale_signal.CHECK,
    missed_signal.CHECK,
    tight_watchdog.CHECK,
    NO_WATCHDOG,
    command_race.CHECK,
    choice_race.CHECK,
    broken_never.CHECK,
    over_limit.CHECK,
    not_settled.CHECK,
    DEAD_END,
    ENDLESS_LOOP,
    UNREACHABLE,
    UNUSED,
    assumed_times.CHECK,
    stale_accept.CHECK,
)

#: What a comment may accept: every kind but the one that is about such comments.
ACCEPTABLE: tuple[str, ...] = tuple(check.kind for check in CHECKS if check is not stale_accept.CHECK)
