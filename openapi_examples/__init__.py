"""Requests that are answered as shown, and the files they send; data, no code."""
