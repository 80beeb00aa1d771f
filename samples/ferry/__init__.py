"""The planning office of a small ferry line."""
