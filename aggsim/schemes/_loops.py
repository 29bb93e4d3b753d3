"""The compiled loops of the schemes: plain arrays in, plain arrays out.

Every function that calls another compiled one lives in this file, because the compiled cache does not notice
an edit in another file.

The rate of change of section p is a quadratic form that is stored as segments,

    rate[p] = sum over segments s of p:  n[big] * dot(coefficient[start:stop], n[low:low + stop - start])

with one row (big, low, start) of the table `segments` for each; `start` of the next row is the `stop` of this
one. A pair (i, j), j <= i, is met by the segments with big = i, so that births next to i and the losses of i
run over long contiguous stretches of j. Sections n and n + 1 count the number and the volume that pass the top.
"""

from __future__ import annotations

import numpy as np
from numba import njit


def compiled(function):  # type: ignore[no-untyped-def]
    """Compile with a cache on disk, or without one where no place can be written (read-only installs)."""
    # reassociation lets the dot products use the vector unit; NaN and infinity keep their meaning
    math = {"reassoc", "contract"}
    try:
        return njit(function, cache=True, nogil=True, fastmath=math)
    except RuntimeError:
        return njit(function, nogil=True, fastmath=math)


@compiled
def interpolation_births(x, n, order, half):  # type: ignore[no-untyped-def]
    """Lagrange weights of every birth x_i + x_j over its `order` nearest pivots, in v or (`half`) in v**0.5.

    `x` holds the n pivots of the grid, continued upward past 2 x[n - 1] by at least order / 2 more. Returns
    (first, count, weight): for the pair t = i (i + 1) / 2 + j the targets are first[t] to
    first[t] + count[t] - 1. Where i is among its own targets its entry is w_i - 1, the net change, which keeps
    full relative accuracy when x_j is far below x_i.
    """
    pairs = n * (n + 1) // 2
    first = np.zeros(pairs, np.int64)
    count = np.ones(pairs, np.int64)
    weight = np.zeros((pairs, order))
    root = np.sqrt(x)
    delta = np.empty(order)
    for i in range(n):
        cell = i
        for j in range(i + 1):
            t = i * (i + 1) // 2 + j
            born = x[i] + x[j]
            while x[cell + 1] <= born * (1.0 + 4e-16):
                cell += 1
            if cell > i and born - x[cell] < 1e-13 * born:
                first[t], weight[t, 0] = cell, 1.0
                continue
            if x[cell + 1] - born < 1e-13 * born:
                first[t], weight[t, 0] = cell + 1, 1.0
                continue
            # at the top the order falls, at the bottom the stencil shifts
            nodes = max(2, min(order, 2 * (n - cell)))
            a = max(0, cell - nodes // 2 + 1)
            first[t], count[t] = a, nodes
            if half and nodes > 2:
                step = x[j] / (np.sqrt(born) + root[i])
                for p in range(nodes):
                    delta[p] = root[a + p] - root[i]
            else:
                step = x[j]
                for p in range(nodes):
                    delta[p] = x[a + p] - x[i]
            w = weight[t]
            number, volume = 0.0, 0.0
            own = -1
            for p in range(nodes):
                if a + p == i:
                    own = p
                    continue
                w[p] = 1.0
                for s in range(nodes):
                    if s != p:
                        w[p] *= (step - delta[s]) / (delta[p] - delta[s])
                number += w[p]
                volume += w[p] * (x[a + p] - x[i])
            # number and volume to the last digit: what round-off left goes to the pivots around the birth
            c = cell - a
            if own >= 0:
                if cell > i:
                    shift = (x[j] - volume) / (x[cell + 1] - x[cell])
                    w[c] -= shift
                    w[c + 1] += shift
                else:
                    shift = (x[j] - volume) / (x[cell + 1] - x[i])
                    w[c + 1] += shift
                    number += shift
                w[own] = -number
            else:
                missing = 1.0 - number
                shift = (x[j] - volume - missing * (x[cell] - x[i])) / (x[cell + 1] - x[cell])
                w[c] += missing - shift
                w[c + 1] += shift
    return first, count, weight


@compiled
def layout(first, count, n):  # type: ignore[no-untyped-def]
    """Segments that hold every birth and loss of the given table, and the first segment of each section."""
    low = np.full((n + 2, n), n, np.int64)
    high = np.zeros((n + 2, n), np.int64)
    for i in range(n):
        low[i, i], high[i, i] = 0, n
        for j in range(i + 1):
            t = i * (i + 1) // 2 + j
            end = first[t] + count[t]
            for p in range(first[t], min(end, n)):
                low[p, i] = min(low[p, i], j)
                high[p, i] = max(high[p, i], j + 1)
            if end > n:
                for p in range(n, n + 2):
                    low[p, i] = min(low[p, i], j)
                    high[p, i] = max(high[p, i], j + 1)
    section = np.zeros(n + 3, np.int64)
    for p in range(n + 2):
        section[p + 1] = section[p]
        for i in range(n):
            if high[p, i] > low[p, i]:
                section[p + 1] += 1
    segments = np.zeros((section[n + 2] + 1, 3), np.uint64)
    s = 0
    for p in range(n + 2):
        for i in range(n):
            if high[p, i] > low[p, i]:
                segments[s, 0], segments[s, 1] = i, low[p, i]
                segments[s + 1, 2] = segments[s, 2] + np.uint64(high[p, i] - low[p, i])
                s += 1
    return segments, section


@compiled
def fill(first, count, weight, segments, section, x, kernel):  # type: ignore[no-untyped-def]
    """Coefficients of the segments for one symmetric kernel matrix (n, n); `x` is continued past the top."""
    n = kernel.shape[0]
    where = np.full((n + 2, n), -1, np.int64)
    for p in range(n + 2):
        for s in range(section[p], section[p + 1]):
            where[p, segments[s, 0]] = np.int64(segments[s, 2]) - np.int64(segments[s, 1])
    out = np.zeros(segments[-1, 2])
    for i in range(n):
        for j in range(i + 1, n):  # i as the smaller partner
            out[where[i, i] + j] -= kernel[i, j]
        for j in range(i + 1):
            t = i * (i + 1) // 2 + j
            events = kernel[i, j] if j < i else 0.5 * kernel[i, i]
            a, b = first[t], first[t] + count[t]
            for p in range(a, b):
                change = events * weight[t, p - a]
                if p < n:
                    out[where[p, i] + j] += change
                else:
                    out[where[n, i] + j] += change
                    out[where[n + 1, i] + j] += change * x[p]
            if not (a <= i < b):
                out[where[i, i] + j] -= events
            if j == i:
                out[where[i, i] + j] -= events
    return out


@compiled
def occupied(number, n):  # type: ignore[no-untyped-def]
    """Sections up to the last that holds anything; below 1e-200 products denormalise, which is slow and nothing."""
    top = n
    while top > 0 and abs(number[top - 1]) < 1e-200:
        top -= 1
    return top


@compiled
def segment_rates(segments, section, coefficient, number, factor, out):  # type: ignore[no-untyped-def]
    """Add factor times the rates to `out` (n + 2,); returns their sum, which is not finite if any is not."""
    top = np.uint64(occupied(number, section.size - 3))
    total = 0.0
    for p in range(section.size - 1):
        rate = 0.0
        for s in range(section[p], section[p + 1]):
            # unsigned indices spare the check for negative ones
            big, low, start = segments[s, 0], segments[s, 1], segments[s, 2]
            if big >= top:
                continue
            dot = 0.0
            for q in range(min(segments[s + 1, 2] - start, top - min(low, top))):
                dot += coefficient[start + q] * number[low + q]
            rate += number[big] * dot
        out[p] += factor * rate
        total += out[p]
    return total


@compiled
def segment_jacobian(segments, section, coefficient, number, factor, out):  # type: ignore[no-untyped-def]
    """Add factor times the exact Jacobian d rate[p] / d n[q] to `out` (n + 2, n + 2)."""
    for p in range(section.size - 1):
        for s in range(section[p], section[p + 1]):
            big, low, start = segments[s, 0], segments[s, 1], segments[s, 2]
            scale = factor * number[big]
            dot = 0.0
            for q in range(segments[s + 1, 2] - start):
                dot += coefficient[start + q] * number[low + q]
                out[p, low + q] += scale * coefficient[start + q]
            out[p, big] += factor * dot


@compiled
def fragment_matrix(x, order, half, rate, parent, volume, count):  # type: ignore[no-untyped-def]
    """Upper triangular matrix (n, n) of breakage: rate[i] * (fragments of i in section k, less 1 for k = i).

    Fragments are shared by Lagrange weights among at most `order` pivots up to their parent, in v or (`half`)
    in v**0.5; those below the first pivot count there by volume. Volume is kept by the diagonal.
    """
    n = x.size
    out = np.zeros((n, n))
    root = np.sqrt(x)
    below = np.empty(order)
    scale = np.empty(order)
    last_a, last_nodes = -1, -1
    # the points of a parent are shared by few stencils, whose denominators are worth keeping
    for t in range(parent.size):
        i, v = parent[t], volume[t]
        if v <= x[0]:
            out[0, i] += count[t] * (v / x[0])
            continue
        nodes = min(order, i + 1)
        cell = min(max(np.searchsorted(x, v, side="right") - 1, 0), i - 1)
        a = max(0, min(cell - nodes // 2 + 1, i + 1 - nodes))
        node, at = (root, np.sqrt(v)) if half and nodes > 2 else (x, v)
        if a != last_a or nodes != last_nodes:
            last_a, last_nodes = a, nodes
            for p in range(nodes):
                scale[p] = 1.0
                for q in range(nodes):
                    if q != p:
                        scale[p] *= node[a + p] - node[a + q]
                scale[p] = 1.0 / scale[p]
        before = count[t]
        for p in range(nodes):
            below[p] = before  # product over the nodes below p
            before *= at - node[a + p]
        after = 1.0
        for p in range(nodes - 1, -1, -1):
            out[a + p, i] += below[p] * after * scale[p]
            after *= at - node[a + p]
    for i in range(n):
        left = 0.0
        for k in range(i):
            out[k, i] *= rate[i]
            left += out[k, i] * x[k]
        out[i, i] = -left / x[i]
    return out


@compiled
def triangular_rates(matrix, number, factor, out):  # type: ignore[no-untyped-def]
    """Add factor * matrix @ number to `out`, for an upper triangular matrix (n, n); return the sum of the rates."""
    n = matrix.shape[0]
    top = occupied(number, n)
    total = 0.0
    for p in range(top):
        rate = 0.0
        for i in range(p, top):
            rate += matrix[p, i] * number[i]
        out[p] += factor * rate
        total += out[p]
    return total


@compiled
def monomer_rates(kernel, x, number, factor, out):  # type: ignore[no-untyped-def]
    """Add factor times the exact discrete Smoluchowski rates on the multiples x_k = (k + 1) x_0."""
    n = x.size
    out_total = 0.0
    beyond_number = 0.0
    beyond_volume = 0.0
    for i in range(n):
        if number[i] == 0.0:
            continue
        loss = 0.0
        scale = factor * number[i]
        row = kernel[i]
        # j < i by the smaller partner; births i + j + 1 while inside the grid
        inside = min(i, n - 1 - i)
        for j in range(inside):
            events = scale * row[j] * number[j]
            loss += events
            out[j] -= events
            out[i + j + 1] += events
        for j in range(inside, i):
            events = scale * row[j] * number[j]
            loss += events
            out[j] -= events
            beyond_number += events
            beyond_volume += events * (x[i] + x[j])
        events = 0.5 * scale * row[i] * number[i]
        loss += 2.0 * events
        if 2 * i + 1 < n:
            out[2 * i + 1] += events
        else:
            beyond_number += events
            beyond_volume += events * 2.0 * x[i]
        out[i] -= loss
    out[n] += beyond_number
    out[n + 1] += beyond_volume
    for p in range(n + 2):
        out_total += out[p]
    return out_total


@compiled
def monomer_jacobian(kernel, x, number, factor, out):  # type: ignore[no-untyped-def]
    """Add factor times the exact Jacobian of `monomer_rates` to `out` (n + 2, n + 2)."""
    n = x.size
    for i in range(n):
        for j in range(n):
            # d/dn_j of the losses of i, and of the births i + j + 1 (each unordered pair is met twice)
            change = factor * kernel[i, j]
            out[i, j] -= change * number[i]
            out[i, i] -= change * number[j]
            born = i + j + 1
            if born < n:
                out[born, j] += change * number[i]
            else:
                out[n, j] += change * number[i]
                out[n + 1, j] += change * number[i] * (x[i] + x[j])
