"""Density and viscosity of water, and gravity."""

from __future__ import annotations

import math

STANDARD_DENSITY = 1000.0  # kg/m3, where no water temperature is given
STANDARD_GRAVITY = 9.81  # m/s2, where no latitude is given
ICE_POINT = 273.15  # K
USUAL_TEMPERATURE = 10.0  # degC, for viscosity where no water temperature is given

# IAPWS SR6-08(2011), Table 1 and eq. 2: specific volume of liquid water at 0.1 MPa
_SCALE = 461.51805 * 10.0 / 1e5  # m3/kg: gas constant x reference temperature / pressure
_CONSTANT = 1.93763157e-2
_UPPER_TERMS = (  # (coefficient, exponent) of 10 K / (593 K - T)
    (6.74458446e3, 4),
    (-2.22521604e5, 5),
    (1.00231247e8, 7),
    (-1.63552118e9, 8),
    (8.32299658e9, 9),
)
_LOWER_TERMS = (  # (coefficient, exponent) of 10 K / (T - 232 K)
    (5.78545292e-3, 1),
    (-1.53195665e-2, 2),
    (3.11337859e-2, 3),
    (-4.23546241e-2, 4),
    (3.38713507e-2, 5),
    (-1.19946761e-2, 6),
)


def density(temperature: float) -> float:
    """Density of liquid water at 0.1 MPa.

    temperature : [degC], 0 to 100

    Returns [kg/m3]. Source: IAPWS SR6-08(2011), eq. 2.

    >>> round(density(4.0), 3)
    999.974
    """
    kelvin = temperature + ICE_POINT
    upper, lower = 10 / (593 - kelvin), 10 / (kelvin - 232)
    volume = _CONSTANT
    volume += sum(a * upper**n for a, n in _UPPER_TERMS)
    volume += sum(b * lower**n for b, n in _LOWER_TERMS)
    return 1 / (_SCALE * volume)


# IAPWS SR6-08(2011): viscosity of liquid water at 0.1 MPa, against T / 300 K
_VISCOSITY_TERMS = (  # (coefficient [1e-6 Pa s], exponent)
    (280.68, -1.9),
    (511.45, -7.7),
    (61.131, -19.6),
    (0.45903, -40.0),
)


def kinematic_viscosity(temperature: float) -> float:
    """Kinematic viscosity of liquid water at 0.1 MPa.

    temperature : [degC], 0 to 100

    Returns [m2/s]. Source: IAPWS SR6-08(2011), viscosity over density.

    >>> round(kinematic_viscosity(20.0) * 1e6, 4)
    1.0034
    """
    ratio = (temperature + ICE_POINT) / 300
    dynamic = 1e-6 * sum(a * math.pow(ratio, n) for a, n in _VISCOSITY_TERMS)
    return dynamic / density(temperature)


def gravity(latitude: float, altitude: float = 0.0) -> float:
    """Acceleration of free fall.

    latitude : [degrees]
    altitude : above sea level [m]

    Returns [m/s2]. Source: the formula of IEC 60041 (quoted from memory).

    >>> round(gravity(45.0), 5)
    9.80622
    """
    return 9.7803 * (1 + 0.0053 * math.sin(math.radians(latitude)) ** 2) - 3e-6 * altitude
