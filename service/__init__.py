"""The HTTP service: routes, formats, keys, pages."""

import os

from service.memory import keep_working_memory

__version__ = "0.1.0"

# Tables are worked on by threads of ours; another pool beside them takes memory and turns.
os.environ.setdefault("POLARS_MAX_THREADS", "1")
keep_working_memory()
