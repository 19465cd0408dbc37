"""Sweeps of network analysers: what is sent, what is asked, what is answered."""
