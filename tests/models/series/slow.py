"""Bins reckoned reading by reading, in plain Python: slow, and the reference of the fast ones."""

import math


def bin_rows(rows, begin, end):
    return [row for row in sorted(rows) if begin <= row[0] < end]


def plain_weights(rows, begin, end):
    held = [row for row in bin_rows(rows, begin, end) if not math.isnan(row[1])]
    return [(row, 1.0) for row in held]


def time_weights(rows, begin, end, gap):
    held = [row for row in sorted(rows) if not math.isnan(row[1])]
    weights = dict.fromkeys(range(len(held)), 0.0)
    for place in range(len(held) - 1):
        left, right = held[place][0], held[place + 1][0]
        if not 0 < right - left <= gap:
            continue
        a, z = max(left, begin), min(right, end)
        if z <= a:
            continue

        # Simpson's rule is exact for the two straight shares
        def share(t, left=left, right=right):
            return (t - left) / (right - left)

        area = (z - a) / 6 * (share(a) + 4 * share((a + z) / 2) + share(z))
        weights[place + 1] += area
        weights[place] += (z - a) - area
    return [(held[place], w) for place, w in weights.items() if w > 0]


def mean(weighted):
    """Value, u and shared part of a weighted mean with the covariance written out."""
    total = sum(w for _, w in weighted)
    if not weighted:
        return math.nan, math.nan, math.nan
    value = sum(w * row[1] for row, w in weighted) / total
    own = sum((w / total) ** 2 * (row[2] ** 2 - row[3] ** 2) for row, w in weighted)
    sources = {row[5] for row, _ in weighted}
    common = sum(
        sum(w / total * row[3] for row, w in weighted if row[5] == source) ** 2
        for source in sources
    )
    return value, math.sqrt(own + common), math.sqrt(common)


def coverage(rows, begin, end, step):
    held = [row[0] for row in bin_rows(rows, begin, end) if not math.isnan(row[1])]
    steps = {math.floor((t - held[0]) / step + 0.5) for t in held}
    return min(1.0, len(steps) / max(1, math.floor((end - begin) / step + 1e-9)))
