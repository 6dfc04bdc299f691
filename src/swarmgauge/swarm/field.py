"""The uniform fields that drive a swarm."""

import math
from dataclasses import dataclass

from swarmgauge.gas import InputError


@dataclass(frozen=True)
class Field:
    """Reduced fields. The force on the electrons is along +z.

    E_over_N_Td : reduced electric field, >= 0, Td (1e-21 V m^2).
    B_over_N_Hx, B_angle_deg, angular_frequency_over_N : reduced magnetic field (1 Hx = 1e-27 T m^3), its angle to the
        force, and the angular frequency of E over N (rad m^3/s); only 0, 90 and 0 in this version.

    Raises InputError for a field that is negative, not finite or not available.
    """

    E_over_N_Td: float
    B_over_N_Hx: float = 0.0
    B_angle_deg: float = 90.0
    angular_frequency_over_N: float = 0.0

    def __post_init__(self) -> None:
        if not math.isfinite(self.E_over_N_Td) or self.E_over_N_Td < 0:
            raise InputError(f"E_over_N_Td = {self.E_over_N_Td:g}: give a finite reduced field of 0 Td or more.")
        for name in ("B_over_N_Hx", "angular_frequency_over_N"):
            if getattr(self, name) != 0.0:
                raise InputError(f"{name} = {getattr(self, name):g}: only 0 is available in this version. Remove it.")
