"""Where a set is used beyond what its file vouches for."""

from swarmgauge.gas import Mixture
from swarmgauge.swarm.field import Field

_TEMPERATURE_TOLERANCE = 0.1  # populations of rotational levels follow the temperature about linearly


def outside(mixture: Mixture, field: Field) -> tuple[str, ...]:
    """One sentence for each set that acts outside its trusted fields or far from the temperature it stands for."""
    warnings = []
    for gas, fraction in zip(mixture.gases, mixture.fractions, strict=True):
        if fraction == 0.0:
            continue
        if gas.trusted_E_over_N_Td is not None:
            low, high = gas.trusted_E_over_N_Td
            if not low <= field.E_over_N_Td <= high:
                warnings.append(f"set {gas.name} is trusted from {low:g} to {high:g} Td only.")
        stated = gas.table_temperature_K
        if stated is not None and abs(mixture.temperature_K - stated) > _TEMPERATURE_TOLERANCE * stated:
            warnings.append(f"set {gas.name} stands for {stated:g} K, not {mixture.temperature_K:g} K.")
    return tuple(warnings)
