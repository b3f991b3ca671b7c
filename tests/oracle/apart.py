"""Texts on which the engine and the player were once apart, by what was amiss. All are kept."""

from __future__ import annotations

#: Each text by what the engine said of it that no run bears out, or what it did not say.
TEXTS = {
    # The next cycle begins at a join, which comes after the step that waited for B12 though others lead to it too.
    "stopped behind a join": """
valve V1 5/2 spring { coil Y11  on 16786..16846 us  off 30812..31119 us }
cylinder clamp on V1 reversed {
    extend 484415..485002 us
    retract 425586..429501 us
    starts extended
    sensor B13 at 30..50 %
    sensor B12 at 93..100 %
}
valve V2 5/2 spring { coil Y21  on 23690..33170 us  off 21008..21911 us }
cylinder lift on V2 {
    extend 510510..511150 us
    retract 426133..484826 us
    sensor B21 at retracted
    sensor B23 at 46..65 %
}
sequence main {
    together {
        step s2 { set Y11  until B13 }
        step s3 { reset Y11  until B12 }
    } and {
        step s4 { set Y21  until B23 }
        step s5 { reset Y21  until B21 }
    }
}
""",
    # Turned back at 30 ms behind 50 % at the latest, 8 ms before it could come to 68 %.
    "an edge that is never reached": """
valve V2 5/3 closed centre { coil Y21 to a  coil Y22 to b  on 20744..29972 us  off 30071..30079 us }
cylinder lift on V2 {
    extend 212463..235214 us
    retract 427354..430137 us
    sensor B21 at retracted
    sensor B23 at 50..68 %
}
sequence main {
    together {
        step s2 { on Y21  until B23 }
        step s5 { on Y22  until B21 }
    } and {
        step s1 { until B23  steady 40000 us }
    }
}
""",
    # B13 passes too quickly on the way out and stays long enough on the way back.
    "steady at the second pass": """
controller { task 8319..9759 us  run 4147..4310 us }
valve V1 5/3 closed centre { coil Y11 to a  coil Y12 to b  on 25000..26000 us  off 20001..30115 us }
cylinder clamp on V1 {
    extend 241664..307199 us
    retract 340871..340880 us
    sensor B11 at retracted
    sensor B13 at 45..55 %
    sensor B12 at extended
}
sequence main {
    together {
        step s12 { on Y11  until B12 }
        clamp-
    } and {
        step s11 { until B13  steady 23595 us }
    }
}
""",
    # The steady time is broken only where the going of B13 is seen at once.
    "a going that has to be seen": """
controller { scan 9 ms }
valve V1 5/2 spring { coil Y11  on 24 ms  off 33 ms }
cylinder clamp on V1 {
    extend 201 ms
    retract 200 ms
    sensor B13 at 45..53 %
    sensor B12 at extended
}
sequence main {
    step s2 { pulse Y11 1413 ms  until B12 }
    step s1 { until B13  steady 2 ms }
}
""",
    # The watchdog expires only where the piston has run past 58 % before it was turned.
    "a piston in one of two stretches": """
valve V4 5/2 spring { coil Y41  on 22895..33944 us  off 26026..28157 us }
cylinder gate on V4 {
    extend 238745..240058 us from coil
    retract 449315..465050 us
    sensor B41 at retracted
    sensor B43 at 45..58 %
}
sequence main {
    step s5 { set Y41  until B43 }
    step s6 { reset Y41  until B41  within 461924 us }
}
""",
    "a piston that may yet stand at its end": """
controller { scan 4707..5402 us }
valve V2 5/2 bistable { coil Y21 to a  coil Y22 to b  on 21952..22733 us }
cylinder lift on V2 {
    extend 250660..252741 us
    retract 327637..336174 us from coil
    uneven 14 %
    sensor B22 at 93..100 %
}
sequence main {
    step s4 { on Y21  until B22 }
    step s6 { pulse Y22 114309 us  dwell 362880 us }
}
""",
    # In the run told B12 has gone before s5 can be left on it, as it should.
    "gone before it could be taken": """
controller { scan 3635..3670 us  input on 478..509 us off 1127..2271 us }
valve V1 5/3 closed centre { coil Y11 to a  coil Y12 to b  on 17944..18526 us  off 26359..35593 us }
cylinder clamp on V1 {
    extend 496520..497958 us
    retract 256152..257876 us
    sensor B12 at extended
}
sequence main {
    step s3 { on Y12  dwell 18869 us }
    step s5 { on Y11  until B12 }
}
""",
    # Y12 ends before Y11 does: the valve is never asked for b.
    "a shift that is never asked for": """
valve V1 5/2 bistable { coil Y11 to a  coil Y12 to b  on 25000..25399 us }
cylinder clamp on V1 {
    extend 275134..321481 us
    retract 344731..349105 us
    sensor B11 at retracted
    sensor B12 at extended
}
sequence main {
    step s5 { on Y11  until B12 }
    step s7 { on Y12  dwell 109094 us }
    step s6 { pulse Y11 127282 us  until B12 }
    step s8 { pulse Y12 99999 us  until B11 }
}
""",
    # The piston has passed both edges of B13 when the read comes that sees it still on; s2 has waited for the first.
    "an overshoot of the far edge of the sensor on which the step was left": """
controller { scan 3000..3800 us }
valve V1 5/3 closed centre { coil Y11 to a  coil Y12 to b  on 15333 us  off 20 ms }
cylinder clamp on V1 {
    extend 200 ms  retract 200..274948 us
    sensor B11 at retracted  sensor B13 at 30..32 % delay 0..355 us  sensor B12 at extended
}
sequence main {
    together {
        step s2 { on Y11  until B13 }
        step s3 { dwell 100 ms }
        step s4 { on Y11  until B12 }
        step s5 { dwell 60 ms }
        step s6 { on Y12  until B11 }
        step s7 { dwell 60 ms }
    } and {
        step s1 { until B13  steady 3299 us }
    }
}
""",
    # With all times least s9 is left in time, and nobody asks B13 while the piston stands.
    "an overshoot that is not certain": """
controller { scan 8387..8562 us }
valve V1 5/2 spring { coil Y11  on 19722..21221 us  off 21661..21737 us }
cylinder clamp on V1 {
    extend 275514..276280 us
    retract 359724..364791 us
    sensor B11 at retracted
    sensor B13 at 50..52 %
}
sequence main {
    together {
        step s10 { set Y11  until B13 }
        step s11 { reset Y11  until B11 }
    } and {
        step s9 { until B13  steady 3168 us }
    }
}
""",
    # The second pass is always too quick, but the first may be slow enough.
    "a second pass that need not come": """
valve V1 5/2 spring { coil Y11  on 15681..15704 us  off 26652..29282 us }
cylinder clamp on V1 {
    extend 349465..415000 us
    retract 209994..210426 us
    sensor B11 at retracted
    sensor B13 at 44..46 %
    sensor B12 at extended
}
sequence main once {
    together {
        step s2 { set Y11  until B12 }
        clamp-
    } and {
        step s1 { until B13  steady 25808 us }
    }
}
""",
    # The gap breaks only where the coil takes longer than typical to decay.
    "a decay that has to be long": """
valve V1 5/3 closed centre { coil Y11 to a  coil Y12 to b  on 20 ms  off 30 ms  decay 0..10 ms  gap 12 ms }
cylinder clamp on V1 {
    extend 400 ms
    retract 300 ms
    sensor B11 at retracted
    sensor B12 at extended
}
sequence main {
    step s1 { on Y11  until B12 }
    step s2 { dwell 19 ms }
    step s3 { on Y12  until B11 }
    step s4 { dwell 40 ms }
}
""",
    # Either branch may be the last: 420..710 ms, not what the one that is typically the last takes.
    "two ends of one run": """
valve V1 5/2 spring { coil Y1  on 20 ms  off 30 ms }
cylinder clamp on V1 {
    extend 400..600 ms
    retract 300 ms
    sensor B1 at extended
}
valve V2 5/2 spring { coil Y2  on 20 ms  off 30 ms }
cylinder lift on V2 {
    extend 300..690 ms
    retract 300 ms
    sensor B2 at extended
}
sequence main once {
    together { step s1 { set Y1  until B1 } } and { step s2 { set Y2  until B2 } }
}
""",
}
