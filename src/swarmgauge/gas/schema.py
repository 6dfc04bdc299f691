"""The form of a set file: its keys and what kind of value each holds. `laws`, `process` and `gas` check the numbers."""

from typing import Annotated, Any, Literal

from pydantic import BaseModel, ConfigDict, Discriminator, Field, Tag

Number = float  # nan and inf pass here: laws and processes say better what is wrong with them


def _form(value: Any) -> str:
    return "table" if isinstance(value, dict) else "word"


class _Entry(BaseModel):
    model_config = ConfigDict(extra="forbid", strict=True)


class PowerEntry(_Entry):
    """A power of energy that follows the last point of a table."""

    power: Number = Field(description="exponent p: last value x (energy / last energy)^p")


class PowerLawEntry(_Entry):
    """at_1_eV_m2 x (energy / 1 eV)^exponent; zero below the threshold."""

    at_1_eV_m2: Number = Field(description="cross section at 1 eV, m2 (m5 for three bodies)")
    exponent: Number = Field(description="0 for a constant")


class RampEntry(_Entry):
    """slope_m2_per_eV x (energy - from_eV) above from_eV."""

    from_eV: Number = Field(description="energy where it starts, eV")
    slope_m2_per_eV: Number = Field(description="slope, m2/eV")


class FractionEntry(_Entry):
    """The ejected electron takes a fixed fraction of the energy that is left after an ionization."""

    fraction: Number = Field(description="0 to 1")


class WidthEntry(_Entry):
    """The ejected electron has energies in proportion to 1 / (1 + (energy / width)^2.1), up to half of what is left."""

    width_eV: Number = Field(description="published width of the gas, eV")


class EjectedEntry(_Entry):
    """The ejected electron has energies in proportion to a table, up to half of what is left."""

    ejected_eV: list[Number] = Field(description="energies from 0, rising, eV")
    density: list[Number] = Field(description="number per energy, any unit; linear between points")


class ParameterEntry(_Entry):
    """Parameter xi of the screened Coulomb form against energy."""

    energy_eV: list[Number] = Field(description="energies before the collision, rising, eV")
    parameter: list[Number] = Field(description="xi, between -1 and 1; linear in energy")


class RatioEntry(_Entry):
    """Momentum transfer over integral cross section against energy."""

    energy_eV: list[Number] = Field(description="energies before the collision, rising, eV")
    ratio: list[Number] = Field(description="1 - <cos chi>, 0.01 to 1.99; linear in energy")


ScreenedEntry = Annotated[
    Annotated[Number, Tag("word")] | Annotated[ParameterEntry, Tag("table")], Discriminator(_form)
]


class AngularEntry(_Entry):
    """An angular law: give screened, or momentum_transfer_ratio, or angles_deg with energy_eV and shape."""

    screened: ScreenedEntry | None = Field(None, description="xi of the screened Coulomb form")
    momentum_transfer_ratio: RatioEntry | None = Field(
        None, description="screened Coulomb form with xi found so that this ratio is met"
    )
    angles_deg: list[Number] | None = Field(None, description="angles of a table, from 0 to 180")
    energy_eV: list[Number] | None = Field(None, description="energies of a table, rising, eV")
    shape: list[list[Number]] | None = Field(
        None, description="differential cross sections, a row for each energy; any unit, each row is normalised"
    )
    convert: bool = Field(False, description="divide an elastic momentum transfer cross section by 1 - <cos chi>")


Beyond = Annotated[
    Annotated[Literal["zero", "hold"], Tag("word")] | Annotated[PowerEntry, Tag("table")], Discriminator(_form)
]


def _sharing_form(value: Any) -> str:
    if not isinstance(value, dict):
        return "word"
    return "width" if "width_eV" in value else "ejected" if {"ejected_eV", "density"} & set(value) else "table"


SharingEntry = Annotated[
    Annotated[Literal["uniform", "equal"], Tag("word")]
    | Annotated[FractionEntry, Tag("table")]
    | Annotated[WidthEntry, Tag("width")]
    | Annotated[EjectedEntry, Tag("ejected")],
    Discriminator(_sharing_form),
]
ScatteringEntry = Annotated[
    Annotated[Literal["isotropic", "forward"], Tag("word")] | Annotated[AngularEntry, Tag("table")],
    Discriminator(_form),
]
ThirdBody = Annotated[
    Annotated[Literal["self", "any"], Tag("word")] | Annotated[dict[str, Number], Tag("table")], Discriminator(_form)
]


class ProcessEntry(_Entry):
    """One [[process]]: give energy_eV, cross_section_m2 and beyond, or power_law, or ramp."""

    id: str = Field(description="short name, unique in the set")
    kind: Literal["elastic", "excitation", "ionization", "attachment"] = Field(description="what happens")
    threshold_eV: Number = Field(description="energy loss, eV; for attachment only the onset")
    label: str = Field(description="what the process is, in words")
    source: str = Field(description="citation")
    energy_eV: list[Number] | None = Field(None, description="energies of the table, strictly rising, eV")
    cross_section_m2: list[Number] | None = Field(None, description="cross sections of the table, m2")
    beyond: Beyond | None = Field(
        None, description="what follows the last point of the table", examples=["zero", "hold", {"power": -0.9}]
    )
    power_law: PowerLawEntry | None = Field(None, description="formula in place of a table")
    ramp: RampEntry | None = Field(None, description="formula in place of a table")
    scattering: ScatteringEntry | None = Field(
        None, description="angular law; default isotropic", examples=["forward", {"screened": 0.5}]
    )
    sharing: SharingEntry | None = Field(
        None,
        description="energy sharing of an ionization; default uniform",
        examples=["equal", {"fraction": 0.3}, {"width_eV": 13}],
    )
    ejecta: Literal["isotropic", "binary"] | None = Field(
        None, description="directions of the two electrons after an ionization; default isotropic"
    )
    degeneracy_lower: Number | None = Field(None, description="statistical weight of the lower level")
    degeneracy_upper: Number | None = Field(None, description="statistical weight of the upper level")
    lower: str | None = Field(None, description="id of the excitation to the lower level; default the ground state")
    vibrational: bool = Field(False, description="the upper level follows a vibrational temperature, where given")
    third_body: ThirdBody | None = Field(
        None,
        description="three-body attachment; cross section then in m5",
        examples=["self", "any", {"O2": 1.0, "N2": 0.02}],
    )
    passive: bool = Field(False, description="averaged over the swarm without acting on it")
    relative_uncertainty: Number | None = Field(None, description="one standard deviation of the cross section")


class SetEntry(_Entry):
    """A set of electron-impact cross sections of one gas."""

    name: str = Field(description="name of the set; in gases/ also that of its file")
    formula: str = Field(description="of the atom or molecule, as CO2")
    molar_mass_g_per_mol: Number = Field(description="molar mass, g/mol")
    elastic_is: Literal["momentum_transfer", "total_momentum_transfer", "integral"] = Field(
        description="what the elastic cross section contains"
    )
    source: str = Field(description="citation")
    rights: str = Field(description="who may use the numbers, and how")
    note: str = Field(description="caveats")
    trusted_E_over_N_Td: Annotated[list[Number], Field(min_length=2, max_length=2)] | None = Field(
        None, description="lowest and highest field for which the set is recommended, Td"
    )
    table_temperature_K: Number | None = Field(None, description="gas temperature that the set stands for, K")
    process: list[ProcessEntry] = Field(description="the processes, sorted by threshold")


def set_file_schema() -> dict[str, Any]:
    """JSON Schema of a set file, for editors."""
    return SetEntry.model_json_schema()
