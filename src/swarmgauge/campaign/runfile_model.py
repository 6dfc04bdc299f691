"""The form of a run file: its keys, their types and their limits."""

from typing import Annotated, Any, Literal

from pydantic import AfterValidator, BaseModel, BeforeValidator, ConfigDict, Discriminator, Field, Tag, WithJsonSchema

SECTIONS_TO_COME = ("refine", "tables")
AS_MEASURED = "measured"


def _as_list(value: Any) -> Any:
    """A single value stands for a list of one."""
    return value if isinstance(value, list) else [value]


def _one_or_many(item: dict[str, Any]) -> WithJsonSchema:
    return WithJsonSchema({"anyOf": [item, {"type": "array", "items": item, "minItems": 1}]})


def _zeros(values: list[float]) -> list[float]:
    """Magnetic and alternating fields do not act yet: anything but 0 is refused rather than ignored."""
    if any(values):
        raise ValueError("only 0 is available in this version. Remove the key.")
    return values


def _fields(value: Any) -> Any:
    if isinstance(value, str) and value != AS_MEASURED:
        raise ValueError('Give a list of fields, a sweep, or "measured" for those of [measured] files.')
    return value if isinstance(value, dict | str) else _as_list(value)


def _form_of_fields(value: Any) -> str:
    if isinstance(value, str):
        return AS_MEASURED
    return "sweep" if isinstance(value, dict | Sweep) else "values"


_NUMBER: dict[str, Any] = {"type": "number", "minimum": 0}
_ANGLE: dict[str, Any] = {"type": "number", "minimum": 0, "maximum": 180}
_FRACTIONS: dict[str, Any] = {"type": "object", "additionalProperties": _NUMBER, "minProperties": 1}
_TARGET: dict[str, Any] = {
    "anyOf": [
        {"type": "number", "exclusiveMinimum": 0, "maximum": 0.2},
        {"type": "object", "properties": dict.fromkeys(("rel", "abs", "from_Td", "to_Td"), _NUMBER)},
    ]
}

_Finite = Annotated[float, Field(allow_inf_nan=False)]
_NonNegative = Annotated[float, Field(ge=0, allow_inf_nan=False)]
_Positive = Annotated[float, Field(gt=0, allow_inf_nan=False)]
_Filled = Field(min_length=1)
_Numbers = Annotated[list[_NonNegative], _Filled, BeforeValidator(_as_list), _one_or_many(_NUMBER)]
_Angles = Annotated[
    list[Annotated[float, Field(ge=0, le=180)]], _Filled, BeforeValidator(_as_list), _one_or_many(_ANGLE)
]
_Zeros = Annotated[
    list[_Finite], _Filled, BeforeValidator(_as_list), AfterValidator(_zeros), WithJsonSchema({"const": 0})
]


class _Section(BaseModel):
    model_config = ConfigDict(extra="forbid", strict=True, frozen=True)


class Sweep(_Section):
    """Reduced fields in equal steps of their logarithm."""

    from_: _Positive = Field(alias="from", examples=[10])
    to: _Positive = Field(examples=[500])
    per_decade: _Positive = Field(examples=[8])


class GasSection(_Section):
    """What the electrons move through."""

    temperature_K: _Numbers = Field(examples=[293.15])
    pressure_Pa: _Numbers | None = Field(default=None, examples=[101325])
    fractions: Annotated[
        list[Annotated[dict[str, _NonNegative], _Filled]],
        _Filled,
        BeforeValidator(_as_list),
        _one_or_many(_FRACTIONS),
    ] = Field(examples=[{"nitrogen-phelps1985": 0.8, "oxygen-lawton1978": 0.2}])
    leave_out: list[str] = Field(default=[], examples=[["oxygen-lawton1978/attachment"]])
    vibrational_temperature_K: _Numbers | None = Field(default=None, examples=[2000])
    level_fractions: dict[str, _NonNegative] = Field(default={}, examples=[{"oxygen-lawton1978/a1delta": 0.01}])

    @property
    def vibrational_temperatures(self) -> list[float | None]:
        """The vibrational temperatures, or the one entry None where levels follow the gas."""
        return [None] if self.vibrational_temperature_K is None else list(self.vibrational_temperature_K)

    @property
    def pressures(self) -> list[float | None]:
        """The pressures, or the one entry None where none is given."""
        return [None] if self.pressure_Pa is None else list(self.pressure_Pa)


class FieldSection(_Section):
    """The uniform fields that drive the swarm."""

    E_over_N_Td: Annotated[
        Annotated[list[_NonNegative], _Filled, _one_or_many(_NUMBER), Tag("values")]
        | Annotated[Sweep, Tag("sweep")]
        | Annotated[Literal["measured"], Tag("measured")],
        Discriminator(_form_of_fields),
        BeforeValidator(_fields),
    ] = Field(examples=[[30, 100, 300]])
    B_over_N_Hx: _Zeros = [0.0]
    B_angle_deg: _Angles = [90.0]
    angular_frequency_over_N: _Zeros = [0.0]
    B_T: _Zeros = [0.0]
    frequency_Hz: _Zeros = [0.0]


class AccuracySection(BaseModel):
    """Limits on time; every other key is a target, checked where targets are parsed."""

    model_config = ConfigDict(
        extra="allow", strict=True, frozen=True, json_schema_extra={"additionalProperties": _TARGET}
    )

    max_minutes_per_point: _Positive = 5.0
    max_minutes: _Positive | None = None

    @property
    def targets(self) -> dict[str, Any]:
        """The targets as they stand in the file."""
        return dict(self.model_extra or {})


class MeasuredSection(_Section):
    """Measurements that the computed coefficients are compared with."""

    files: list[str] | None = Field(default=None, min_length=1, examples=[["measured/nitrogen.csv"]])


class SensitivitySection(_Section):
    """Present where derivatives of the coefficients by the cross sections are wanted; it has no keys."""


class RunFileModel(_Section):
    """A whole run file."""

    title: str = Field(default="", examples=["feed gas of an ozone cell"])
    seed: int = Field(default=1, ge=0, lt=2**63)
    gas: GasSection
    field: FieldSection
    accuracy: AccuracySection = AccuracySection()
    measured: MeasuredSection | None = None
    sensitivity: SensitivitySection | None = None


def run_file_schema() -> dict[str, Any]:
    """JSON Schema of a run file, for editors that complete and check while typing."""
    return RunFileModel.model_json_schema()
