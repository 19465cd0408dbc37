"""The soil behind a spectrum: water content, pore water and bound water from the whole band."""
