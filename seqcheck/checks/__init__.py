"""Finding kinds, one a file; the tuple in ``catalogue`` lists them all."""
