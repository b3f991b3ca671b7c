"""Machine texts of any length for the benchmarks: invented stations in a row, each with a clamp and a lift."""

from __future__ import annotations

_DEVICES = """
valve V{n}a 5/2 spring        {{ coil Y{n}a  on 18..28 ms  off 25..40 ms }}
valve V{n}b 5/3 closed centre {{ coil Y{n}b to a  coil Y{n}c to b  on 20..30 ms  off 30..45 ms }}
cylinder clamp{n} on V{n}a {{
    extend 380..450 ms  retract 300..360 ms  sensor B{n}a at retracted  sensor B{n}b at extended
}}
cylinder lift{n} on V{n}b {{
    extend 600..700 ms  retract 500..620 ms  sensor B{n}c at 0..4 %  sensor B{n}d at 96..100 %
}}
"""


def in_a_row(steps: int, stations: int = 10) -> str:
    """A sequence of about so many steps: station after station moves out and in, round and round."""
    parts = ["controller { scan 8..12 ms  input 2..4 ms  output 0.5..1 ms }"]
    parts += [_DEVICES.format(n=number) for number in range(stations)]
    parts.append("sequence main {\n    every step within 20 s")
    for start in range(0, steps, 4):
        n = start // 4 % stations
        parts += [
            f"    step s{start} {{ set Y{n}a  until B{n}b }}",
            f"    step s{start + 1} {{ on Y{n}b  until B{n}d }}",
            f"    step s{start + 2} {{ on Y{n}c  until B{n}c }}",
            f"    step s{start + 3} {{ reset Y{n}a  until B{n}a }}",
        ]
    return "\n".join([*parts, "}\n"])
