"""Modules that take long to load are loaded beside everything else, before a request needs them."""

import threading
from importlib import import_module


def load_beside(*modules: str) -> None:
    """Load modules in a thread of their own, one after the other."""

    def load() -> None:
        for module in modules:
            import_module(module)

    threading.Thread(target=load, name=f"load {modules[0]}", daemon=True).start()
