"""Gases with simple laws, made on the spot."""

from swarmgauge.gas import Gas, Mixture, Process
from swarmgauge.gas.constants import ATOMIC_MASS, E_MASS, SPEED_1_EV
from swarmgauge.gas.laws import PowerLaw

HELIUM_U = 4.002602
ELECTRON_U = E_MASS / ATOMIC_MASS


def power_law(kind, at_1_eV_m2, exponent=0.0, *, threshold_eV=0.0, name="", **more):
    """A process with the cross section at_1_eV_m2 x (energy / eV)^exponent."""
    return Process(name or kind, kind, threshold_eV, PowerLaw(at_1_eV_m2, exponent), **more)


def constant_frequency(kind, frequency, **more):
    """A process whose frequency over N, m3/s, does not depend on energy."""
    return power_law(kind, frequency / SPEED_1_EV, -0.5, **more)


def model_gas(molar_mass, *processes, name="model"):
    """A gas of these processes."""
    return Gas(name, "X", molar_mass, "momentum_transfer", processes)


def model(molar_mass, *processes, temperature_K=0.0):
    """A mixture of one model gas."""
    return Mixture({model_gas(molar_mass, *processes): 1.0}, temperature_K=temperature_K)
