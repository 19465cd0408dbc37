"""What is stored: soils, probes, stations, their readings, and what is asked about them."""
