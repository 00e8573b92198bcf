"""Results that are named tuples."""

from typing import NamedTuple


class CoverageInterval(NamedTuple):
    """An interval that covers the true value with a stated chance.

    Examples
    --------
    >>> import albedra as al
    >>> low, high = al.Estimate(2.0, 0.1).coverage_interval(0.95)
    >>> round(low, 3), round(high, 3)
    (1.804, 2.196)
    """

    low: float
    """Lower end, in the unit of the estimate."""

    high: float
    """Upper end, in the unit of the estimate."""


# The strings under fields are for readers of this file; help() shows these.
CoverageInterval.low.__doc__ = "Lower end, in the unit of the estimate."
CoverageInterval.high.__doc__ = "Upper end, in the unit of the estimate."
