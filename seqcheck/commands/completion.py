"""``seqcheck completion``: what lets a shell complete commands, options and their values.

Takes the name of a shell; gives a script made of the arguments of every command.
"""

from __future__ import annotations

import argparse
from collections.abc import Iterator

from seqcheck.arguments import SAFETY
from seqcheck.commands.statuses import FINE, ended

EPILOG = f"In bash: source <(seqcheck completion bash), for good in ~/.bashrc.\n\n{SAFETY}"

_BASH = """\
# Completion of seqcheck for bash; made by: seqcheck completion bash
_seqcheck() {{
    local current="${{COMP_WORDS[COMP_CWORD]}}" words=""
    case "$COMP_CWORD:${{COMP_WORDS[1]}}:${{COMP_WORDS[COMP_CWORD-1]}}" in
{cases}
    esac
    COMPREPLY=()
    [ -z "$words" ] || COMPREPLY=($(compgen -W "$words" -- "$current"))
}}
complete -o default -F _seqcheck seqcheck
"""


def add_arguments(command: argparse.ArgumentParser) -> None:
    command.add_argument("shell", choices=["bash"], metavar="SHELL", help="bash")


def run(options: argparse.Namespace) -> int:
    from seqcheck.report.delivery import send

    return ended(FINE, send(_BASH.format(cases="\n".join(_cases()))))


def _cases() -> Iterator[str]:
    """By the number of the word, the command and the word before: the words that may come. Where there are none, the
    shell offers files."""
    from seqcheck.checks.explain import explained_kinds
    from seqcheck.commands.registry import COMMANDS, command_named

    yield _case("1:*", [*COMMANDS, "--help", "--version"])
    yield _case("2:explain:*", explained_kinds())
    for name in COMMANDS:
        alone = argparse.ArgumentParser()
        command_named(name).add_arguments(alone)
        for action in alone._actions:
            for option in action.option_strings:
                if action.choices:
                    yield _case(f"*:{name}:{option}", [str(choice) for choice in action.choices])
                elif action.nargs != 0:
                    yield _case(f"*:{name}:{option}", ())
        options = [option for action in alone._actions for option in action.option_strings]
        words = [
            str(choice) for action in alone._actions if not action.option_strings for choice in action.choices or ()
        ]
        yield f'        *:{name}:*) if [[ "$current" == -* ]]; then words="{" ".join(options)}"; else'
        yield f'            words="{" ".join(words)}"; fi ;;'


def _case(pattern: str, words: list[str] | tuple[str, ...]) -> str:
    return f'        {pattern}) words="{" ".join(words)}" ;;'
