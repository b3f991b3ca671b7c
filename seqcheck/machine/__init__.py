"""The model of a machine. Imports nothing else of seqcheck."""
