"""``seqcheck explain``: what a kind of finding means, a sequence that shows it and the mended one."""

from __future__ import annotations

import argparse

from seqcheck.arguments import SAFETY
from seqcheck.commands.statuses import FINE, UNREADABLE, advice, ended

EPILOG = SAFETY


def add_arguments(command: argparse.ArgumentParser) -> None:
    command.add_argument("kind", nargs="?", metavar="KIND", help="a kind of finding (all are listed if left out)")


def run(options: argparse.Namespace) -> int:
    from seqcheck.checks.explain import explained_kinds, explanation, explanations
    from seqcheck.report.delivery import send
    from seqcheck.report.explanation import render_explanation, render_list

    if options.kind is None:
        return ended(FINE, send(render_list(explanations())))
    one = explanation(options.kind)
    if one is None:
        told = advice(options.kind, explained_kinds(), "seqcheck explain lists all")
        return ended(UNREADABLE, f"there is no kind of finding {options.kind}; {told}")
    return ended(FINE, send(render_explanation(one)))
