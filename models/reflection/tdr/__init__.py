"""Time-domain reflectometry: a trace of reflected steps to permittivity and conductivity."""
