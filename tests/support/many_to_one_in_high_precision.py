"""The many-to-one tail with sigma known in 20-digit arithmetic, for sizes however unequal.

By mpmath's tanh-sinh quadrature over z, between points that close in on z = r and z = -r as far as the
smallest own part c_i asks for. Arguments count as the exact binary numbers they are.
"""

import itertools
from collections import Counter
from collections.abc import Sequence

import mpmath as mp

DIGITS = 20


def normal_maximum_tail(r: float, n_control: float, n_others: Sequence[float], sides: int) -> mp.mpf:
    """P(max |X_i| > r) for two `sides`, P(max X_i > r) for one."""
    with mp.workdps(DIGITS):
        at, n_0 = mp.mpf(r), mp.mpf(n_control)
        parts = [(mp.sqrt(n / (n_0 + n)), mp.sqrt(n_0 / (n_0 + n)), k) for n, k in Counter(n_others).items()]

        def lost(z: mp.mpf) -> mp.mpf:
            log_kept = mp.mpf(0)
            for b, c, count in parts:
                tail = mp.ncdf((b * z - at) / c)
                if sides == 2:
                    tail += mp.ncdf((-b * z - at) / c)
                log_kept += count * mp.log1p(-tail) if tail < 1 else -mp.inf
            # Times exp(r²/2): the quadrature stops at an absolute error.
            return -mp.exp((at - z) * (at + z) / 2) * mp.expm1(log_kept)

        smallest = min(c for _, c, _ in parts)
        end = mp.sqrt(at * at + 100)
        offsets, offset = [mp.mpf(0)], smallest
        while offset < 2 * end:
            offsets.append(offset)
            offset *= 2
        points = {
            z for centre in {at, -at} for o in offsets for z in (centre - o, centre + o) if abs(z) < end
        }
        whole = sorted(points | {-end, end} | {mp.mpf(z) for z in range(-int(end), int(end) + 1)})
        total = mp.fsum(mp.quad(lost, pair) for pair in itertools.pairwise(whole))
        return total * mp.npdf(at)
