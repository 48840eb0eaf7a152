"""Other ways to the same numbers: long decimal arithmetic, and the real-gas equation CIPM-2007."""

import math
from decimal import Decimal, localcontext

_DIGITS = 40
_R = Decimal("287.05287")
_T0 = Decimal("288.15")
_P0 = Decimal(101325)
_LAPSE = Decimal("0.0065")
_N = _R * _LAPSE / Decimal("9.80665")
_K = _N / (1 - _N)


def station_pressure_pa(altimeter_pa: float, elevation_m: float) -> Decimal:
    """Return the station pressure by the troposphere's formulas in 40 digits."""
    with localcontext() as context:
        context.prec = _DIGITS
        ratio = (Decimal(altimeter_pa) / _P0) ** _N - _LAPSE * Decimal(elevation_m) / _T0
        return _P0 * ratio ** (1 / _N)


def density_altitude_m(pressure_pa: Decimal, temperature_k: float, dewpoint_k: float | None) -> Decimal:
    """Return the density altitude (below the tropopause) in 40 digits, moist by Sonntag (1990) and WMO-No. 8."""
    with localcontext() as context:
        context.prec = _DIGITS
        virtual_k = Decimal(temperature_k)
        if dewpoint_k is not None:
            dew_k = Decimal(dewpoint_k)
            exponent = (
                Decimal("-6096.9385") / dew_k
                + Decimal("16.635794")
                - Decimal("2.711193e-2") * dew_k
                + Decimal("1.673952e-5") * dew_k**2
                + Decimal("2.433502") * dew_k.ln()
            )
            pressure_hpa = pressure_pa / 100
            factor = Decimal("1.0016") + Decimal("3.15e-6") * pressure_hpa - Decimal("0.074") / pressure_hpa
            share = factor * exponent.exp() / pressure_hpa
            virtual_k /= 1 - (1 - Decimal("18.01528") / Decimal("28.9644")) * share
        density = pressure_pa / (_R * virtual_k)
        return _T0 / _LAPSE * (1 - (density / (_P0 / (_R * _T0))) ** _K)


def cipm_2007_density_kg_m3(pressure_pa: float, temperature_k: float, dewpoint_k: float) -> float:
    """Return the density of moist air by CIPM-2007, for 400 µmol/mol of carbon dioxide.

    Picard, Davis, Gläser and Fujii, Revised formula for the density of moist air (CIPM-2007), Metrologia 45 (2008)
    149-155; constants from memory.
    """
    temperature_c = temperature_k - 273.15
    vapour_pa = math.exp(
        1.2378847e-5 * dewpoint_k**2 - 1.9121316e-2 * dewpoint_k + 33.93711047 - 6.3431645e3 / dewpoint_k
    )
    enhancement = 1.00062 + 3.14e-8 * pressure_pa + 5.6e-7 * (dewpoint_k - 273.15) ** 2
    fraction = enhancement * vapour_pa / pressure_pa
    compressibility = (
        1.0
        - pressure_pa
        / temperature_k
        * (
            1.58123e-6
            - 2.9331e-8 * temperature_c
            + 1.1043e-10 * temperature_c**2
            + (5.707e-6 - 2.051e-8 * temperature_c) * fraction
            + (1.9898e-4 - 2.376e-6 * temperature_c) * fraction**2
        )
        + (pressure_pa / temperature_k) ** 2 * (1.83e-11 - 0.765e-8 * fraction**2)
    )
    molar_mass = 28.96546e-3
    dry = pressure_pa * molar_mass / (compressibility * 8.314472 * temperature_k)
    return dry * (1.0 - fraction * (1.0 - 18.01528e-3 / molar_mass))
