"""Names, units and order of the computed quantities."""

_VELOCITY = "m/s"
_RATE = "m^3/s"
_LINEAR = "1/(m s)"
_MOBILITY = "1/(m V s)"
_AREA = "m^2"

# Name to unit, in the order of output. A name that ends in ":" stands for one quantity per process, <set>/<process>.
UNITS = {
    "drift_velocity_flux": _VELOCITY,
    "drift_velocity_bulk": _VELOCITY,
    "mobility_times_N_flux": _MOBILITY,
    "mobility_times_N_bulk": _MOBILITY,
    "diffusion_L_times_N_flux": _LINEAR,
    "diffusion_T_times_N_flux": _LINEAR,
    "diffusion_L_times_N_bulk": _LINEAR,
    "diffusion_T_times_N_bulk": _LINEAR,
    "characteristic_energy_T_flux": "eV",
    "characteristic_energy_L_flux": "eV",
    "characteristic_energy_T_bulk": "eV",
    "characteristic_energy_L_bulk": "eV",
    "skewness_L_times_N2_flux": "1/(m^3 s)",
    "skewness_L_times_N2_bulk": "1/(m^3 s)",
    "mean_energy": "eV",
    "energy_flux_mobility_times_N": _MOBILITY,
    "energy_flux_diffusion_L_times_N": _LINEAR,
    "energy_flux_diffusion_T_times_N": _LINEAR,
    "rate:": _RATE,
    "rate3:": "m^6/s",
    "superelastic_rate:": _RATE,
    "maxwellian_rate:": _RATE,
    "maxwellian_rate3:": "m^6/s",
    "maxwellian_superelastic_rate:": _RATE,
    "collision_frequency_over_N": _RATE,
    "ionization_frequency_over_N": _RATE,
    "attachment_frequency_over_N": _RATE,
    "net_frequency_over_N": _RATE,
    "mean_free_path_times_N": "1/m^2",
    "field_heating_over_N": "W m^3",
    "energy_loss_coefficient": "eV m^3/s",
    "energy_balance_residual": "1",
    "loss_fraction:": "1",
    "gain_fraction:": "1",
    "townsend_alpha_over_N": _AREA,
    "townsend_eta_over_N": _AREA,
    "townsend_effective_over_N": _AREA,
    "sst_mean_energy": "eV",
    "sst_drift_velocity": _VELOCITY,
    "sst_rate:": _RATE,
    "sst_rate3:": "m^6/s",
    "sst_superelastic_rate:": _RATE,
}
KNOWN_PATTERNS = [name + "*" if name.endswith(":") else name for name in UNITS]
_ORDER = {name: place for place, name in enumerate(UNITS)}


def family(name: str) -> str:
    """The key of UNITS that a quantity name belongs to."""
    return name.split(":", 1)[0] + ":" if ":" in name else name


def unit_of(name: str) -> str:
    """Unit of a quantity."""
    return UNITS[family(name)]


def needs_displacements(name: str) -> bool:
    """Whether a quantity rests on the ways of electrons and their ancestors, not on their velocities alone."""
    return name.endswith("_bulk") or any(word in name for word in ("diffusion_", "characteristic_energy_", "skewness_"))


def is_spatial(name: str) -> bool:
    """Whether a quantity belongs to the steady-state Townsend swarm."""
    return name.startswith(("townsend_", "sst_"))


def in_order(names) -> list[str]:
    """Names in the order of output; those of one family keep their order."""
    return sorted(names, key=lambda name: _ORDER[family(name)])
