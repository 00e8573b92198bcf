"""Where light goes in a closed cavity: Monte Carlo photon transport with an uncertainty on every number.

Lengths are metres, times seconds, angles radians, fluxes watts, absorption coefficients m⁻¹ (Napierian).
"""

from ._albedra import __version__

__all__ = ["__version__"]
