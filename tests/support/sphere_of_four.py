"""The tail of Grubbs' ratio for the two largest of four values, by an integral over the sphere."""

import mpmath as mp


def four_values_tail(ratio: float) -> mp.mpf:
    """P(ratio of sums of squares without and with the two largest of four values <= `ratio`).

    The residuals of four values are a point on a sphere; those in rising order fill one of 24 equal
    triangles, in which the ratio is the square of one coordinate z. At a given z the triangle spans
    acos(tan(latitude) / sqrt(3)) - atan(1 / sqrt(2)).
    """
    with mp.workdps(40):
        root = mp.sqrt(mp.mpf(ratio))
        return 6 / mp.pi * mp.quad(_angle, [0, root / 2, root])


def _angle(z: mp.mpf) -> mp.mpf:
    return mp.acos(z / mp.sqrt(3 * (1 - z * z))) - mp.atan(1 / mp.sqrt(2))
