"""Ends of coverage intervals without draws: closed forms, curves of single inputs, reliability."""
