"""seqcheck proves the timing of solenoid valve sequences for all times within their tolerances."""

__version__ = "0.1.0"
