"""Raw reflections to permittivity: traces, coaxial tips, filled lines and cells, two-port cells."""
