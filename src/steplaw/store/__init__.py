"""Finished runs, kept by the content of everything that decides them."""

from steplaw.store.database import Store, open_store
from steplaw.store.kept import Kept, machine

__all__ = ["Kept", "Store", "machine", "open_store"]
