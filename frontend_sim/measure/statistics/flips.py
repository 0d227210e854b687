"""Whether verdicts that flip are more than chance."""

from __future__ import annotations


def flip_probability(better: int, worse: int) -> float:
    """Return how probable as lopsided flips are, if either way is as likely.

    Of the pairs whose verdicts differ, the number that became worse is binomial with one half, if
    nothing but chance makes a verdict flip. Two-sided, exact; 1 without flips. Source: McNemar
    1947, "Note on the sampling error of the difference between correlated proportions".

    Parameters
    ----------
    better, worse : runs that failed before and hold now, and the other way round
    """
    from scipy.special import bdtr

    total = better + worse
    if total == 0:
        return 1.0
    return min(1.0, 2.0 * float(bdtr(min(better, worse), total, 0.5)))
