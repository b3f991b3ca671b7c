"""Machine texts for the growth figures: moves in branches side by side, repeated moves, choices in a row. All
invented."""

from __future__ import annotations

CONTROLLER = "controller { scan 8..12 ms  input 2..4 ms  output 0.5..1 ms }"


def _cylinder(number: int) -> str:
    return f"""
valve V{number} 5/2 spring {{ coil Y{number}  on 18..28 ms  off 25..40 ms }}
cylinder C{number} on V{number} {{
    extend {380 + number}..450 ms  retract 300..360 ms  sensor B{number}a at retracted  sensor B{number}b at extended
}}"""


def side_by_side(branches: int, moves: int) -> str:
    """``branches`` at once, each with a cylinder of its own that makes ``moves`` moves."""
    parts = [" ".join(f"C{number}+ C{number}-" for _ in range(moves // 2)) for number in range(branches)]
    body = parts[0] if branches == 1 else "together " + "\n and ".join(f"{{ {part} }}" for part in parts)
    devices = "\n".join(_cylinder(number) for number in range(branches))
    return f"{CONTROLLER}{devices}\nsequence main {{\nevery step within 5 s\n{body}\n}}\n"


def one_after_the_other(cylinders: int, moves: int) -> str:
    """The same cylinders and moves in one branch."""
    body = "\n".join(f"C{number}+ C{number}-" for _ in range(moves // 2) for number in range(cylinders))
    devices = "\n".join(_cylinder(number) for number in range(cylinders))
    return f"{CONTROLLER}{devices}\nsequence main {{\nevery step within 5 s\n{body}\n}}\n"


def repeated(times: int) -> str:
    """Two moves of one cylinder, over and over in one round."""
    return f"{CONTROLLER}{_cylinder(0)}\nsequence main {{\nevery step within 5 s\nrepeat {times} {{ C0+ C0- }}\n}}\n"


def choices(count: int) -> str:
    """One choice after another, each asked of a signal from outside."""
    signals = "\n".join(f"signal part{number} from outside" for number in range(count))
    body = "\n".join(
        f"choose {{ when part{number} {{ C0+ C0- }} otherwise {{ step skip{number} {{ dwell 50 ms }} }} }}"
        for number in range(count)
    )
    return f"{CONTROLLER}{_cylinder(0)}\n{signals}\nsequence main {{\nevery step within 5 s\n{body}\n}}\n"
