import harbour_masters_almanac


def tides(n: int) -> int:
    return harbour_masters_almanac.tides(n)
