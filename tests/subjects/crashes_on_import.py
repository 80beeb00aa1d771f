import ctypes

ctypes.string_at(0)


def never_reached(n: int) -> int:
    return n
