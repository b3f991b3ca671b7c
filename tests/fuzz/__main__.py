"""``python -m tests.fuzz --inputs 200000``: a fuzzing run with its figures; exit status 1 where a fault was found.

``--language`` has texts read and laid out only; else each is checked or charted. ``--inputs`` not reached within
``--minutes`` are left out, and the figures say so.
"""

from __future__ import annotations

import argparse
import sys
import time

from tests.fuzz.running import Request, Tally, run, smallest_of


def main() -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.fuzz", description=__doc__.split("\n")[0])
    parser.add_argument("--inputs", type=int, default=5_000)
    parser.add_argument("--minutes", type=float, default=30)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--jobs", type=int, default=2)
    parser.add_argument("--language", action="store_true", help="read and lay out only")
    options = parser.parse_args()
    begin = time.monotonic()
    until = begin + 60 * options.minutes
    requests = [
        Request(options.seed, range(job, options.inputs, options.jobs), until, not options.language)
        for job in range(options.jobs)
    ]
    tally = run(requests)
    _print(tally, options.inputs, time.monotonic() - begin)
    for fault in tally.faults:
        one = smallest_of(tally, requests[0], fault)
        print(
            f"\n{fault}: {tally.faults[fault]} times; the smallest found, from input {min(tally.shown_by[fault])[1]}:"
        )
        print(one.text.decode("utf-8", "backslashreplace"))
        if one.sheet is not None:
            print(f"with the sheet\n{one.sheet.decode('utf-8', 'backslashreplace')}")
    return 1 if tally.faults else 0


def _print(tally: Tally, wanted: int, seconds: float) -> None:
    statuses = ("0", "1", "2", "fault", "?")
    print(f"{tally.done} of {wanted} inputs in {seconds:.0f} s; exit status, or a fault of the program:")
    print(f"{'':12}" + "".join(f"{status:>9}" for status in statuses))
    for kind in sorted({kind for kind, _ in tally.statuses}):
        print(f"{kind:12}" + "".join(f"{tally.statuses[kind, status]:9}" for status in statuses))
    slowest, number = tally.slowest
    print(f"slowest: {slowest:.2f} s (input {number}); most memory of a process: {tally.peak_mebibytes:.0f} MiB")


if __name__ == "__main__":
    sys.exit(main())
