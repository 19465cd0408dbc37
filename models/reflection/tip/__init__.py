"""Coaxial tips: standards, aperture, permittivity."""
