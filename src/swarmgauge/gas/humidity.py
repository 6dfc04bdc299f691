"""How much water vapour is in a humid gas."""

import math
from collections.abc import Sequence

import numpy as np

from .errors import MixtureError
from .power import strict_exp, strict_power

# Liquid: W. Wagner and A. Pruss, J. Phys. Chem. Ref. Data 31, 387 (2002), eq. (2.5), and table of coefficients there.
_CRITICAL_K, _CRITICAL_PA = 647.096, 22.064e6
_LIQUID = (
    (1.0, -7.85951783),
    (1.5, 1.84408259),
    (3.0, -11.7866497),
    (3.5, 22.6807411),
    (4.0, -15.9618719),
    (7.5, 1.80122502),
)
# Ice: W. Wagner, T. Riethmann, R. Feistel and A. H. Harvey, J. Phys. Chem. Ref. Data 40, 043103 (2011), eq. (4).
_TRIPLE_K, _TRIPLE_PA = 273.16, 611.657
_ICE = ((0.00333333333, -21.2144006), (1.20666667, 27.3203819), (1.70333333, -6.10598130))
_COLDEST_K = 50.0


def saturation_pressure_Pa(temperature_K: float) -> float:
    """Vapour pressure of water, over ice below 273.16 K, Pa.

    Formulas of Wagner and Pruss (2002) for the liquid and of Wagner, Riethmann, Feistel and Harvey (2011) for ice, the
    same bits on every processor. At a dew point or frost point it is the pressure of the vapour in the gas.
    Raises MixtureError outside 50 to 647.096 K.
    """
    if not _COLDEST_K <= temperature_K <= _CRITICAL_K:
        raise MixtureError(
            f"temperature_K = {temperature_K:g}: the vapour pressure of water is known from {_COLDEST_K:g} to "
            f"{_CRITICAL_K:g} K. Give a temperature in K between them."
        )
    if temperature_K < _TRIPLE_K:
        exponent = _series(_ICE, temperature_K / _TRIPLE_K) * (_TRIPLE_K / temperature_K)
        return _TRIPLE_PA * float(strict_exp(np.array(exponent)))
    exponent = _series(_LIQUID, 1.0 - temperature_K / _CRITICAL_K) * (_CRITICAL_K / temperature_K)
    return _CRITICAL_PA * float(strict_exp(np.array(exponent)))


def _series(terms: Sequence[tuple[float, float]], place: float) -> float:
    return math.fsum(factor * float(strict_power(np.array(place), power)) for power, factor in terms)


def water_fraction(relative_humidity: float, temperature_K: float, pressure_Pa: float) -> float:
    """Fraction of the molecules of a humid gas that are water.

    relative_humidity : 0 to 1, pressure of the vapour over that at saturation. temperature_K, pressure_Pa : of the
    whole gas. Ideal gases; at 1 bar real air holds up to 0.5 % more vapour (common knowledge of hygrometry).
    Raises MixtureError for impossible values, and where that much vapour would exceed the pressure.
    """
    if not 0.0 <= relative_humidity <= 1.0:
        raise MixtureError(
            f"relative_humidity = {relative_humidity:g} is outside 0 to 1. If per cent was meant, divide by 100."
        )
    if not 0.0 < pressure_Pa < math.inf:
        raise MixtureError(f"pressure_Pa = {pressure_Pa:g} is not possible. Give a finite number above 0.")
    vapour = relative_humidity * saturation_pressure_Pa(temperature_K)
    if vapour > pressure_Pa:
        raise MixtureError(
            f"the water vapour alone has {vapour:.4g} Pa, more than pressure_Pa = {pressure_Pa:g}. "
            "Lower the humidity or the temperature."
        )
    return vapour / pressure_Pa
