"""``python -m tests.bench [GROUP...]`` prints the table of the benchmark, row by row; no group means all of them.

Exit status 1 where a ratio is over its limit.
"""

from __future__ import annotations

import sys

from tests.bench.table import GROUPS, Row


def main(names: list[str]) -> int:
    unknown = set(names) - set(GROUPS)
    if unknown:
        print(f"there is no group {', '.join(sorted(unknown))}; there are {', '.join(GROUPS)}", file=sys.stderr)
        return 2
    over = 0
    print(f"{'left : right':66}{'ratio':>10}{'asked':>9}")
    for name in names or GROUPS:
        for row in GROUPS[name]():
            print(told(row), flush=True)
            over += row.met is False
    return 1 if over else 0


def told(row: Row) -> str:
    ratio = "not yet" if row.ratio is None else f"{row.ratio:.4g}"
    limit = "" if row.limit is None else f"< {row.limit:g}"
    mark = {None: "", True: "  met", False: "  OVER"}[row.met]
    return f"{row.what:66}{ratio:>10}{limit:>9}{mark}" + (f"\n    {row.more}" if row.more else "")


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
