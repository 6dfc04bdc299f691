"""What can have been measured: names, units, and the questions that an unclear name leaves open."""

from swarmgauge.gas.errors import suggestion
from swarmgauge.swarm.quantities import UNITS

# What papers on pulsed Townsend experiments print.
PT_RATIO = "net_frequency_over_drift_bulk_over_N"
METHODS = ("TOF", "PT", "SST", "other")
_PER_PROCESS = ("rate:", "rate3:")
_SIGNED = ("net_frequency", "townsend_effective", "skewness")
MEASURABLE = {
    name: unit
    for name, unit in {**UNITS, PT_RATIO: "m^2"}.items()
    if not name.endswith(":") and not name.startswith(("field_heating", "energy_balance"))
}
_SYMBOLS = {
    "drift_velocity": ("w", "v", "v_d", "vd", "w_e", "drift", "velocity", "drift_speed"),
    "mobility_times_N": ("mu", "mun", "mu_n", "mu*n", "mobility"),
    "diffusion_L_times_N": ("d_l", "dl", "nd_l", "dln", "d_l*n", "d_l_times_n", "diffusion_l"),
    "diffusion_T_times_N": ("d_t", "dt", "d", "nd_t", "dtn", "d_t*n", "d_t_times_n", "diffusion_t", "diffusion"),
    "characteristic_energy_L": ("d_l/mu", "dl/mu", "dlmu"),
    "characteristic_energy_T": ("d_t/mu", "dt/mu", "d/mu", "dmu", "characteristic_energy", "k1"),
}
_GROWTH = ("alpha", "alpha/n", "alpha_over_n", "alpha/p", "eta", "eta/n", "ionization_coefficient", "townsend")


def unit_of_measured(name: str) -> str | None:
    """The unit of a quantity that can have been measured, or None."""
    for prefix in _PER_PROCESS:
        if name.startswith(prefix) and "/" in name[len(prefix) :]:
            return UNITS[prefix]
    return MEASURABLE.get(name)


def can_be_negative(name: str) -> bool:
    """Whether a quantity has either sign."""
    return name.startswith(_SIGNED)


def question_about(name: str) -> str:
    """What to ask about a name that is none of the measurable quantities."""
    stem = name if f"{name}_bulk" in MEASURABLE else _stem_of(name)
    if stem:
        return (
            f"flux or bulk? Bulk is what a drift tube times ({stem}_bulk), flux is what a drift-diffusion equation "
            f"takes ({stem}_flux); a pulsed Townsend experiment must say which. Give the full name."
        )
    if name.lower() in _GROWTH:
        return (
            "growth along a steady stream (townsend_alpha_over_N, townsend_eta_over_N, townsend_effective_over_N) or "
            f"frequency of growth in time over the bulk drift velocity ({PT_RATIO})? They differ. Give the full name."
        )
    return f"is none that can be compared.{suggestion(name, MEASURABLE)} README.md lists the names."


def conflict_with_method(name: str, method: str) -> str | None:
    """Why an experiment of this kind does not measure this quantity, or None where it does."""
    in_space = name.startswith(("townsend_", "sst_"))
    if method == "TOF" and name.endswith("_flux"):
        return f"a time-of-flight tube measures bulk values. Write {name.removesuffix('_flux')}_bulk, or method other."
    if method in ("TOF", "PT") and in_space:
        return (
            f"is of a steady stream, and {method} follows a pulse in time. Give what it measured "
            f"(net_frequency_over_N, {PT_RATIO}), or method SST."
        )
    if method == "SST" and not in_space and not name.startswith(("characteristic_energy", "rate")):
        return "is of a pulse in time; a steady stream measures townsend_* (growth in space). Give that, or its method."
    return None


def _stem_of(symbol: str) -> str | None:
    return next((stem for stem, symbols in _SYMBOLS.items() if symbol.lower() in symbols), None)
