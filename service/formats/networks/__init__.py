"""Files of network analysers."""
