"""The demonstration: an invented farm and an invented embankment, over real HTTP."""
