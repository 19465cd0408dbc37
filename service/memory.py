"""How the C library keeps the memory of one block of rows for the next.

Left alone, glibc hands the working columns of each block back to the system and takes them again,
zeroed page by page: a third of the time of an estimate with salt.
"""

import ctypes
from contextlib import suppress

TRIM_THRESHOLD, MMAP_THRESHOLD, ARENA_MAX = -1, -3, -8
"""Names of glibc's ``mallopt``."""
KEPT = 32 << 20
"""Bytes at the end of the heap that are kept: the working columns of a block, and some."""
APART = 4 << 20
"""Bytes from which a piece is taken from the system for itself: longer than any working column."""


def keep_working_memory() -> None:
    """For the life of this process, before its threads begin; nothing where glibc is not."""
    with suppress(OSError, AttributeError, TypeError):
        tune = ctypes.CDLL(None).mallopt
        tune(ARENA_MAX, 1)  # else each thread keeps as much
        tune(MMAP_THRESHOLD, APART)
        tune(TRIM_THRESHOLD, KEPT)
