"""Tolls: the element visits that C code makes inside one instruction."""
