"""The compiled loops of the schemes on cells: plain arrays in, plain arrays out.

Pivots x and the limits between cells are those of the grid, continued past its top; cell p reaches from limit[p]
to limit[p + 1]. Entries n and n + 1 of `out` count the number and the volume that pass the top.
"""

from __future__ import annotations

import numpy as np

from aggsim.schemes._loops import compiled


@compiled
def birth_runs(x, limit, n):  # type: ignore[no-untyped-def]
    """Cells of all births x_i + x_j, j <= i < n, as runs of smaller partners j.

    `x` holds m pivots, of which the last takes all births above its lower limit. Returns (first, run): the runs of
    the larger partner i are rows first[i] to first[i + 1] - 1 of `run`, each (cell, first j, last j + 1).
    """
    first = np.zeros(n + 1, np.int64)
    run = np.zeros((n * (n + 1) // 2, 3), np.int64)
    s = 0
    for i in range(n):
        cell = i
        for j in range(i + 1):
            # births on a limit belong above it, whatever round-off says
            while cell + 1 < x.size and x[i] + x[j] >= limit[cell + 1] * (1.0 - 1e-12):
                cell += 1
            if j == 0 or run[s - 1, 0] != cell:
                run[s, 0], run[s, 1] = cell, j
                s += 1
            run[s - 1, 2] = j + 1
        first[i + 1] = s
    return first, run[:s].astype(np.uint64)


@compiled
def share_average(x, n, born, excess, factor, out):  # type: ignore[no-untyped-def]
    """Add factor times the births of each cell to `out`, shared with the neighbour on the side of their mean.

    Cell p has `born[p]` births per second with the volume born[p] x_p + excess[p]. The cells from n on lie past the
    top. The first cell shares with the one above, the last with the one below. Returns the sum of what it wrote.
    """
    m = x.size
    net = born.copy()
    for p in range(m):
        q = p + 1 if p == 0 or (excess[p] >= 0.0 and p < m - 1) else p - 1
        moved = excess[p] / (x[q] - x[p])
        net[p] -= moved
        net[q] += moved
    total = 0.0
    for p in range(m):
        if p < n:
            out[p] += factor * net[p]
            total += out[p]
        else:
            out[n] += factor * net[p]
            out[n + 1] += factor * net[p] * x[p]
            total += out[n + 1]
    return total


@compiled
def share_average_slopes(x, n, born, excess, side, factor, out):  # type: ignore[no-untyped-def]
    """Add factor times the derivatives of `share_average` to `out`, given those of births and excess (m, n).

    `side` (m,) is the excess itself, whose sign says which neighbour takes part.
    """
    m = x.size
    for p in range(m):
        q = p + 1 if p == 0 or (side[p] >= 0.0 and p < m - 1) else p - 1
        moved = excess[p] / (x[q] - x[p])
        stays = born[p] - moved
        for target, change in ((p, stays), (q, moved)):
            row = out[min(target, n)]
            for k in range(n):
                row[k] += factor * change[k]
            if target >= n:
                for k in range(n):
                    out[n + 1, k] += factor * x[target] * change[k]


@compiled
def average_rates(kernel, x, first, run, number, factor, out):  # type: ignore[no-untyped-def]
    """Add factor times the rates of aggregation with averaged births to `out`; return the sum of what it wrote.

    `kernel` (n, n) has half its diagonal. A larger partner whose birth stays in its own cell neither leaves nor is
    born: only the volume that it took up counts, which keeps its digits where the smaller partner is tiny.
    """
    n = kernel.shape[0]
    top = n
    while top > 0 and abs(number[top - 1]) < 1e-200:  # products would denormalise, which is slow and nothing
        top -= 1
    born = np.zeros(x.size)
    excess = np.zeros(x.size)
    volume = np.empty(top)
    for i in range(top):
        volume[i] = number[i] * x[i]
    for i in range(top):
        row = kernel[i]
        own = np.uint64(i)  # unsigned indices spare the check for negative ones
        lost = 0.0
        for q in range(np.uint64(top) - own):  # as the smaller partner
            lost += row[own + q] * number[own + q]
        for s in range(first[i], first[i + 1]):
            p, low, high = run[s, 0], run[s, 1], run[s, 2]
            taken = 0.0
            if p == own:
                for q in range(high - low):
                    taken += row[low + q] * volume[low + q]
            else:
                met = 0.0
                for q in range(high - low):
                    met += row[low + q] * number[low + q]
                    taken += row[low + q] * volume[low + q]
                lost += met
                born[p] += number[i] * met
                taken += (x[i] - x[p]) * met
            excess[p] += number[i] * taken
        born[i] -= number[i] * lost
    return share_average(x, n, born, excess, factor, out)


@compiled
def average_jacobian(kernel, x, first, run, number, factor, out):  # type: ignore[no-untyped-def]
    """Add factor times the exact Jacobian of `average_rates` to `out` (n + 2, n + 2)."""
    n = kernel.shape[0]
    born = np.zeros((x.size, n))
    excess = np.zeros((x.size, n))
    side = np.zeros(x.size)
    for i in range(n):
        row, lost = kernel[i], born[i]
        own = np.uint64(i)
        met = 0.0
        for q in range(np.uint64(n) - own):
            met += row[own + q] * number[own + q]
            lost[own + q] -= row[own + q] * number[i]
        for s in range(first[i], first[i + 1]):
            p, low, high = run[s, 0], run[s, 1], run[s, 2]
            slope = excess[p]
            taken = 0.0
            if p == own:
                for q in range(high - low):
                    volume = row[low + q] * x[low + q]
                    taken += volume * number[low + q]
                    slope[low + q] += volume * number[i]
            else:
                gained = born[p]
                ours = 0.0
                above = x[i] - x[p]
                for q in range(high - low):
                    volume = row[low + q] * (above + x[low + q])
                    taken += volume * number[low + q]
                    slope[low + q] += volume * number[i]
                    ours += row[low + q] * number[low + q]
                    gained[low + q] += row[low + q] * number[i]
                    lost[low + q] -= row[low + q] * number[i]
                met += ours
                gained[i] += ours
            slope[i] += taken
            side[p] += taken * number[i]
        lost[i] -= met
    share_average_slopes(x, n, born, excess, side, factor, out)


@compiled
def share_above(limit, spread, fixed, p):  # type: ignore[no-untyped-def]
    """Share of the particles of cell `spread` that a particle of volume `fixed` lifts above limit[p].

    Their volume is evenly spread over the cell, so that their number goes as the logarithm of v.
    """
    low, high = limit[spread], limit[spread + 1]
    reach = fixed + (high - limit[p])
    if reach <= 0.0:
        return 0.0
    if reach >= high - low:
        return 1.0
    share = np.log1p(reach / (high - reach)) / np.log(high / low)
    if p != spread + 1:  # limits that coincide do so to round-off
        if share < 1e-12:
            return 0.0
        if share > 1.0 - 1e-12:
            return 1.0
    return share


@compiled
def volume_above(x, limit, i, j, p):  # type: ignore[no-untyped-def]
    """Volume above limit[p] of the births of i and j: each brings its own, with the other spread over its cell."""
    return x[i] * share_above(limit, j, x[i], p) + x[j] * share_above(limit, i, x[j], p)


@compiled
def flux_births(x, limit, n):  # type: ignore[no-untyped-def]
    """Births of all pairs by the volume that each cell receives, as `schemes._loops.layout` reads them.

    `x` holds the n pivots of the grid, continued past 2 x[n - 1]. Where the larger partner i is among its own
    targets its entry is the net change, from the volume of the smaller one alone.
    """
    pairs = n * (n + 1) // 2
    first = np.zeros(pairs, np.int64)
    count = np.ones(pairs, np.int64)
    last = x.size - 1
    for i in range(n):
        cell = i
        for j in range(i + 1):
            t = i * (i + 1) // 2 + j
            while cell < last and volume_above(x, limit, i, j, cell + 1) == x[i] + x[j]:
                cell += 1
            first[t] = cell
            while first[t] + count[t] <= last and volume_above(x, limit, i, j, first[t] + count[t]) > 0.0:
                count[t] += 1
    weight = np.zeros((pairs, count.max()))
    for i in range(n):
        for j in range(i + 1):
            t = i * (i + 1) // 2 + j
            below = x[j] if first[t] == i else x[i] + x[j]
            for p in range(count[t]):
                above = 0.0
                if p < count[t] - 1:
                    above = volume_above(x, limit, i, j, first[t] + p + 1)
                weight[t, p] = (below - above) / x[first[t] + p]
                below = above
    return first, count, weight
