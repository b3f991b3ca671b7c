"""A second, plain player of a machine, written from the meaning of the language alone, to hold the engine against."""
