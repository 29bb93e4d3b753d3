"""The compiled loops of the stochastic simulation: tuples of plain arrays and a numpy generator in and out.

Particle i of replicate r is `volume[r, i]` [m3], 0 where it is no longer there, and `section[r, i]`, the number
of its size class. A partner of -1 - k in place of a second particle means breakage by law k.
"""

from __future__ import annotations

import math
from typing import Any, NamedTuple

import numpy as np
from numba import njit

NOTHING = np.iinfo(np.int64).max  # no candidate


class Samples(NamedTuple):
    """All replicates. `pending` is the candidate that ended the last block, with the bound of its rate."""

    volume: Any  # (replicates, capacity) m3
    section: Any  # (replicates, capacity)
    used: Any  # (replicates,) places in use, of living and lost particles
    time: Any  # (replicates,) s
    suspension: Any  # (replicates,) m3, the volume of suspension that the particles stand for
    pending: Any  # (replicates, 2)
    pending_ceiling: Any  # (replicates,)
    collisions: Any  # (replicates,)
    breakages: Any  # (replicates,)


class Limits(NamedTuple):
    """Upper bounds of rates for the size classes from `lowest` on."""

    smallest: float  # m3, lower end of class 0
    lowest: int
    pairs: Any  # (n, n) m3/s
    single: Any  # (laws, n) 1/s


class Block(NamedTuple):
    """Candidate events; those of replicate r are offset[r] to offset[r + 1]."""

    offset: Any  # (replicates + 1,)
    one: Any
    two: Any
    when: Any  # s
    ceiling: Any  # bound of the rate
    first: Any  # (replicates, n + 1) ends of the classes among the particles
    factor: Any  # (replicates,) 1/m3, events per second of one pair for a collision rate of 1
    end: Any  # (replicates,) s, until when the candidates are complete


class Draft(NamedTuple):
    """One replicate inside a block: counts by class, and which particles have changed."""

    number: Any  # (n,) particles
    changed: Any  # (n,) changed particles among them
    met: Any  # (n,) m3/s, bounds summed over all particles
    fragile: Any  # (n,) 1/s, bounds summed over laws
    touched: Any  # (capacity,) whether changed
    newer: Any  # the changed particles that are there


def compiled(function):  # type: ignore[no-untyped-def]
    """Compile with a cache on disk, or without one where no place can be written (read-only installs)."""
    try:
        return njit(function, cache=True, nogil=True)
    except RuntimeError:
        return njit(function, nogil=True)


@compiled
def class_of(volume, smallest):  # type: ignore[no-untyped-def]
    """Number of the size class of a volume; class c reaches from smallest 2**(c/2) to smallest 2**((c + 1)/2)."""
    return np.int64(math.floor(2.0 * math.log2(volume / smallest)))


@compiled
def classify(samples, smallest, r):  # type: ignore[no-untyped-def]
    """Set the classes of the particles of a replicate; returns the lowest and the highest."""
    low, high = NOTHING, -NOTHING
    for i in range(samples.used[r]):
        c = class_of(samples.volume[r, i], smallest)
        samples.section[r, i] = c
        low, high = min(low, c), max(high, c)
    return low, high


@compiled
def propose(random, samples, limits, corrected, stop):  # type: ignore[no-untyped-def]
    """A block of candidates of every replicate that has not reached `stop`, as if nothing would happen."""
    replicates, n = samples.used.size, limits.pairs.shape[0]
    first = np.zeros((replicates, n + 1), np.int64)
    factor, end = np.zeros(replicates), np.full(replicates, stop)
    offset = np.zeros(replicates + 1, np.int64)
    room = 0
    for r in range(replicates):
        if samples.time[r] < stop:
            _gather(samples, r, limits.lowest, first[r])
            room += _block(samples.used[r])
    one, two = np.empty(room, np.int64), np.empty(room, np.int64)
    when, ceiling = np.empty(room), np.empty(room)
    block = Block(offset, one, two, when, ceiling, first, factor, end)
    for r in range(replicates):
        offset[r + 1] = offset[r]
        if samples.time[r] < stop:
            living = samples.used[r]
            factor[r] = 1.0 / samples.suspension[r]
            if corrected and living > 1:
                factor[r] *= living / (living - 1)
            offset[r + 1] = _propose(random, samples, limits, block, r, offset[r] + _block(living))
    t = offset[replicates]
    return Block(offset, one[:t], two[:t], when[:t], ceiling[:t], first, factor, end)


@compiled
def _block(living):  # type: ignore[no-untyped-def]
    """Candidates per block: about as many as come before one of a changed particle."""
    return int(1.2 * math.sqrt(living)) + 4


@compiled
def _gather(samples, r, lowest, first):  # type: ignore[no-untyped-def]
    """Sort the living particles of a replicate by class and close the gaps; `first` gets the ends of classes."""
    used = samples.used[r]
    volume, section = samples.volume[r, :used].copy(), samples.section[r, :used].copy()
    one, two = samples.pending[r, 0], samples.pending[r, 1]
    for i in range(used):
        if volume[i] > 0.0:
            first[section[i] - lowest + 1] += 1
    for c in range(first.size - 1):
        first[c + 1] += first[c]
    place = first.copy()
    for i in range(used):
        if volume[i] > 0.0:
            p = place[section[i] - lowest]
            place[section[i] - lowest] += 1
            samples.volume[r, p], samples.section[r, p] = volume[i], section[i]
            if i == one:
                samples.pending[r, 0] = p
            if i == two:
                samples.pending[r, 1] = p
    samples.used[r] = first[-1]


@compiled
def _propose(random, samples, limits, block, r, full):  # type: ignore[no-untyped-def]
    """Fill the block of a replicate from offset[r] up to `full` at most; returns its end."""
    first, bound, breaking, n = block.first[r], limits.pairs, limits.single, limits.pairs.shape[0]
    factor = block.factor[r] if first[n] > 1 else 0.0
    time = samples.time[r]
    count = block.offset[r]
    if samples.pending[r, 0] != NOTHING:
        block.one[count], block.two[count] = samples.pending[r, 0], samples.pending[r, 1]
        block.when[count], block.ceiling[count] = time, samples.pending_ceiling[r]
        count += 1
    number = np.empty(n)
    for a in range(n):
        number[a] = first[a + 1] - first[a]
    met, share = _met(bound, number), np.zeros(n)
    collisions = 0.0
    for a in range(n):
        share[a] = 0.5 * factor * met[a]
        collisions += share[a] * number[a]
    total = collisions
    for law in range(breaking.shape[0]):
        for a in range(n):
            total += breaking[law, a] * number[a]
    while total > 0.0:
        if count == full:
            block.end[r] = time
            break
        time += random.standard_exponential() / total
        if not time < block.end[r]:
            break
        u = random.random() * total
        if u < collisions:
            a = _choose(u, share, number)
            b = _choose(random.random() * met[a], bound[a], number)
            i = first[a] + np.int64(random.random() * number[a])
            j = first[b] + np.int64(random.random() * number[b])
            if i == j:  # a particle does not meet itself
                continue
            top = bound[a, b]
        else:
            law, a = _choose_breakage(u - collisions, breaking, number)
            i, j, top = first[a] + np.int64(random.random() * number[a]), -1 - law, breaking[law, a]
        block.one[count], block.two[count], block.when[count], block.ceiling[count] = i, j, time, top
        count += 1
    return count


@compiled
def _met(bound, number):  # type: ignore[no-untyped-def]
    """Bounds summed over all particles (n,)."""
    out = np.zeros(number.size)
    for b in range(number.size):
        if number[b] > 0.0:
            for a in range(number.size):
                out[a] += bound[b, a] * number[b]
    return out


@compiled
def _choose(u, weight, number):  # type: ignore[no-untyped-def]
    """Class in which `u`, between 0 and the sum, falls; round-off at the end goes to the last that counts."""
    chosen = -1
    for c in range(number.size):
        if number[c] > 0.0 and weight[c] > 0.0:
            chosen = c
            u -= weight[c] * number[c]
            if u < 0.0:
                break
    return chosen


@compiled
def _choose_breakage(u, breaking, number):  # type: ignore[no-untyped-def]
    law, a = -1, -1
    for k in range(breaking.shape[0]):
        for c in range(number.size):
            if u >= 0.0 and number[c] > 0.0 and breaking[k, c] > 0.0:
                law, a = k, c
                u -= breaking[k, c] * number[c]
    return law, a


@compiled
def perform(random, samples, limits, block, rate, pieces, few, many):  # type: ignore[no-untyped-def]
    """Decide on a block with the true rates (m,) and the pieces (m, k) [m3] of the candidates that are breakages.

    A replicate of which `few` particles are left, or that has `many`, stops there. Returns the number of particles
    (replicates,), and the lowest and highest class of those that are new.
    """
    living = samples.used.copy()
    low, high = NOTHING, -NOTHING
    for r in range(samples.used.size):
        if block.first[r, -1] > 0:  # in this block; time may stand still where rates are very high
            living[r], bottom, top = _perform(random, samples, limits, block, r, rate, pieces, few, many)
            low, high = min(low, bottom), max(high, top)
    return living, low, high


@compiled
def _perform(random, samples, limits, block, r, rate, pieces, few, many):  # type: ignore[no-untyped-def]
    """Carry out the block of one replicate.

    Particles that have changed leave the list of candidates and get a clock of their own, with the bounds that
    belong to their new sizes. When that clock rings first, its candidate goes into `pending` and the block ends
    there. It also ends with an event that leaves the classes or brings the number of particles to a limit.
    """
    bound, breaking, n = limits.pairs, limits.single, limits.pairs.shape[0]
    volume, section = samples.volume[r], samples.section[r]
    first, factor = block.first[r], block.factor[r]
    start, stop = block.offset[r], block.offset[r + 1]
    number, fragile = np.empty(n), np.zeros(n)
    for a in range(n):
        number[a] = first[a + 1] - first[a]
        for law in range(breaking.shape[0]):
            fragile[a] += breaking[law, a]
    draft = Draft(
        number,
        np.zeros(n),
        _met(bound, number),
        fragile,
        np.zeros(first[n] + (stop - start) * pieces.shape[1], np.bool_),
        np.empty((stop - start) * (1 + pieces.shape[1]), np.int64),
    )
    touched, time, living = draft.touched, samples.time[r], first[n]
    news = 0
    low, high = NOTHING, -NOTHING
    samples.pending[r, 0] = samples.pending[r, 1] = NOTHING
    for k in range(start, stop + 1):
        ahead = block.when[k] if k < stop else block.end[r]
        while news > 0:
            pairs = factor if living > 1 else 0.0
            total = 0.0
            for c in range(n):
                if draft.changed[c] > 0.0:
                    total += draft.changed[c] * (pairs * draft.met[c] + fragile[c])
            if total <= 0.0:
                break
            ring = time + random.standard_exponential() / total
            if not ring < ahead:
                break
            time = ring
            i, j, top = _candidate_of_changed(random, total, pairs, section, first, limits, draft, news)
            # a pair of two changed particles is met twice, from either side
            if j != i and not (0 <= j < i and touched[j]):
                samples.pending[r, 0], samples.pending[r, 1] = i, j
                samples.pending_ceiling[r] = top
                samples.time[r] = time
                return living, low, high
        time = ahead
        if k == stop:
            break
        i, j = block.one[k], block.two[k]
        if touched[i] or (j >= 0 and touched[j]) or random.random() * block.ceiling[k] >= rate[k]:
            continue
        used = samples.used[r]
        _take_out(section[i] - limits.lowest, bound, draft)
        touched[i] = True
        if j >= 0:
            samples.collisions[r] += 1
            _take_out(section[j] - limits.lowest, bound, draft)
            touched[j] = True
            volume[i] += volume[j]
            volume[j] = 0.0
            living -= 1
        else:
            samples.breakages[r] += 1
            volume[i] = 0.0
            for p in range(pieces.shape[1]):
                if pieces[k, p] > 0.0:
                    if volume[i] == 0.0:
                        volume[i] = pieces[k, p]
                    else:
                        volume[samples.used[r]] = pieces[k, p]
                        samples.used[r] += 1
            living += samples.used[r] - used
        inside = True
        for p in range(used - 1, samples.used[r]):
            q = i if p < used else p
            c = class_of(volume[q], limits.smallest)
            section[q] = c
            low, high = min(low, c), max(high, c)
            touched[q] = True
            c -= limits.lowest
            if 0 <= c < n:
                number[c] += 1.0
                draft.changed[c] += 1.0
                for a in range(n):
                    draft.met[a] += bound[c, a]
                draft.newer[news] = q
                news += 1
            else:
                inside = False
        if not inside or living <= few or living >= many:
            break
    samples.time[r] = time
    return living, low, high


@compiled
def _take_out(c, bound, draft):  # type: ignore[no-untyped-def]
    draft.number[c] -= 1.0
    for a in range(draft.met.size):
        draft.met[a] -= bound[c, a]


@compiled
def _candidate_of_changed(random, total, pairs, section, first, limits, draft, news):  # type: ignore[no-untyped-def]
    """A changed particle, its partner or the law by which it breaks, and the bound of the rate."""
    weight = np.empty(draft.met.size)
    for c in range(weight.size):
        weight[c] = pairs * draft.met[c] + draft.fragile[c]
    a = _choose(random.random() * total, weight, draft.changed)
    i = _changed(np.int64(random.random() * draft.changed[a]), a + limits.lowest, section, draft, news)
    u = random.random() * weight[a] - pairs * draft.met[a]
    if u >= 0.0 and draft.fragile[a] > 0.0:
        law = -1
        for k in range(limits.single.shape[0]):
            if u >= 0.0 and limits.single[k, a] > 0.0:
                law = k
                u -= limits.single[k, a]
        return i, -1 - law, limits.single[law, a]
    b = _choose(random.random() * draft.met[a], limits.pairs[a], draft.number)
    rank = np.int64(random.random() * draft.number[b])
    j = i
    if rank < draft.changed[b]:
        j = _changed(rank, b + limits.lowest, section, draft, news)
    else:
        while draft.touched[j]:
            j = first[b] + np.int64(random.random() * (first[b + 1] - first[b]))
    return i, j, limits.pairs[a, b]


@compiled
def _changed(rank, c, section, draft, news):  # type: ignore[no-untyped-def]
    """The changed particle of class c with this rank among them."""
    for p in range(news):
        if section[draft.newer[p]] == c:
            if rank == 0:
                return draft.newer[p]
            rank -= 1
    return draft.newer[0]
