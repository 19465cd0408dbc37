"""Permittivity spectra over HTTP: what a request says, what an answer tells, and its chart."""
