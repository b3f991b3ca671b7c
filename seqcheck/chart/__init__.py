"""The timing chart of a machine, and the forms in which it is shown."""
