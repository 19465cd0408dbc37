"""Equivalent circuits of a filled cell: of relaxation terms, of two units, of three branches."""
