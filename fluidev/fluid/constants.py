"""Constants of nature, exact in the SI of 2019."""

from __future__ import annotations

import math

ELEMENTARY_CHARGE = 1.602176634e-19  # C
PLANCK = 6.62607015e-34  # J s
REDUCED_PLANCK = PLANCK / (2.0 * math.pi)
BOLTZMANN = 1.380649e-23  # J/K
