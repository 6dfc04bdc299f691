"""Units as papers on swarms print them, turned into SI, eV and Td.

A unit is a product such as cm2/s, 1e-20 m2, V/(cm Torr) or cm-1 Torr-1. A pressure stands for the density of gas
that it means at a temperature, N = p/kT: that of the row, or one that the unit states, as V/(cm Torr) at 273.15 K.
"""

import math
import re
from dataclasses import dataclass

from swarmgauge.gas import InputError
from swarmgauge.gas.constants import BOLTZMANN, E_CHARGE, TOWNSEND
from swarmgauge.gas.errors import suggestion

_TORR = 101325.0 / 760.0
ICE_POINT_K = 273.15
_ONE, _LENGTH, _TIME, _VOLT, _DENSITY = (0, 0, 0), (1, 0, 0), (0, 1, 0), (0, 0, 1), (-3, 0, 0)
# Symbol to factor and powers of m, s and V. Energies count as voltages: one eV is one V for an electron.
_SYMBOLS: dict[str, tuple[float, tuple[int, int, int]]] = {
    "m": (1.0, _LENGTH),
    "cm": (1e-2, _LENGTH),
    "mm": (1e-3, _LENGTH),
    "um": (1e-6, _LENGTH),
    "s": (1.0, _TIME),
    "ms": (1e-3, _TIME),
    "us": (1e-6, _TIME),
    "ns": (1e-9, _TIME),
    "V": (1.0, _VOLT),
    "kV": (1e3, _VOLT),
    "eV": (1.0, _VOLT),
    "meV": (1e-3, _VOLT),
    "J": (1.0 / E_CHARGE, _VOLT),
    "Td": (TOWNSEND, (2, 0, 1)),
    "mTd": (1e-3 * TOWNSEND, (2, 0, 1)),
}
_PRESSURES_PA = {
    "Pa": 1.0,
    "hPa": 100.0,
    "kPa": 1e3,
    "bar": 1e5,
    "mbar": 100.0,
    "Torr": _TORR,
    "mTorr": 1e-3 * _TORR,
    "mmHg": 133.322387415,  # conventional millimetre of mercury, BIPM brochure on the SI
    "atm": 101325.0,
}
_THERMAL = "kT"  # as a unit of energies: kT/e in V
_TOKEN = re.compile(r"\s*(?:([A-Za-z]+)(?:\^?(-?\d)(?!\d))?|(1)(?![\d.])|([/()*·]))")
_NUMBER = re.compile(r"\s*(10\^-?\d+|\d+(?:\.\d*)?[eE][-+]?\d+)(?=[\s*·/])")
_TEMPERATURE = re.compile(r"(.*?)\s+at\s+(-?\d+(?:\.\d*)?)\s*(K|C)$")


class UnitError(InputError):
    """A unit that is not known, not clear, or not one of the quantity."""


@dataclass(frozen=True)
class Unit:
    """factor : to SI, with eV for energies. powers : of m, s and V."""

    factor: float
    powers: tuple[int, int, int]

    def times(self, other: "Unit", power: int) -> "Unit":
        """This unit times a power of another."""
        powers = tuple(a + power * b for a, b in zip(self.powers, other.powers, strict=True))
        return Unit(self.factor * other.factor**power, powers)  # type: ignore[arg-type]


def factor_to(unit: str, wanted: str, temperature_K: float | None, pressure_Pa: float | None = None) -> float:
    """What a number in `unit` is multiplied by to be one in `wanted`.

    temperature_K : of the gas, where the unit holds a pressure or kT. pressure_Pa : where the number was not yet
    multiplied or divided by N, as a diffusion coefficient in cm2/s for D N.
    Raises UnitError with what is wrong and what to do.
    """
    found, goal = parse_unit(unit, temperature_K), parse_unit(wanted, temperature_K)
    for power in (0, 1, -1):
        density = Unit(1.0, _DENSITY)
        if found.times(density, power).powers == goal.powers:
            factor = found.factor / goal.factor
            if power:
                factor *= _density(unit, wanted, temperature_K, pressure_Pa) ** power
            if 0.0 < factor < math.inf:
                return factor
            raise UnitError(f'unit "{unit}": its factor has no place among numbers. Give a unit of usual size.')
    raise UnitError(f'unit "{unit}" is none of this quantity, which is in {wanted}. Give its unit.')


def parse_unit(text: str, temperature_K: float | None = None) -> Unit:
    """A unit from its text; raises UnitError."""
    body = text.strip()
    if stated := _TEMPERATURE.match(body):
        body = stated[1]
        temperature_K = float(stated[2]) + (ICE_POINT_K if stated[3] == "C" else 0.0)
        if not temperature_K > 0.0:
            raise UnitError(
                f'unit "{text}": a gas at {temperature_K:g} K has no density. Give a temperature above 0 K.'
            )
    factor = 1.0
    if number := _NUMBER.match(body):
        factor = float(number[1].replace("10^", "1e"))
        body = body[number.end() :]
    return _Reader(text, body.replace("kT/e", _THERMAL), temperature_K).read(factor)


class _Reader:
    """Reads one unit from left to right. A stroke takes the next factor only; what could mean two things is refused."""

    def __init__(self, text: str, body: str, temperature_K: float | None) -> None:
        self.text, self.temperature_K = text, temperature_K
        self.tokens = self._split(body)

    def read(self, factor: float) -> Unit:
        if not self.tokens:
            raise UnitError(f'unit "{self.text}" is empty. Give a unit; a pure number has the unit 1.')
        unit = self._product(closing=False)
        return Unit(factor * unit.factor, unit.powers)

    def _split(self, body: str) -> list[re.Match[str]]:
        tokens, place = [], 0
        while body[place:].strip():
            token = _TOKEN.match(body, place)
            if token is None:
                raise UnitError(f'unit "{self.text}": "{body[place:].strip()}" is not understood. {_HOW_TO_WRITE}')
            tokens.append(token)
            place = token.end()
        return tokens

    def _product(self, *, closing: bool) -> Unit:
        unit, power, after_stroke = Unit(1.0, _ONE), 1, False
        while self.tokens:
            token = self.tokens.pop(0)
            sign = token[4]
            if sign == ")":
                if not closing:
                    break
                return unit
            if sign == "/":
                if not self.tokens or power == -1:
                    break
                power = -1
            elif sign not in ("*", "·"):
                if after_stroke and power == 1:
                    raise UnitError(f'unit "{self.text}": does the stroke cover what follows? {_HOW_TO_WRITE}')
                unit = unit.times(self._product(closing=True) if sign == "(" else self._factor(token), power)
                after_stroke, power = power == -1, 1
        else:
            if not closing:
                return unit
        raise UnitError(f'unit "{self.text}": brackets or strokes do not match. {_HOW_TO_WRITE}')

    def _factor(self, token: re.Match[str]) -> Unit:
        if token[3]:
            return Unit(1.0, _ONE)
        return Unit(1.0, _ONE).times(self._symbol(token[1]), int(token[2] or 1))

    def _symbol(self, symbol: str) -> Unit:
        if symbol in _SYMBOLS:
            return Unit(*_SYMBOLS[symbol])
        if symbol in _PRESSURES_PA:
            return Unit(_PRESSURES_PA[symbol] / (BOLTZMANN * self._temperature(symbol)), _DENSITY)
        if symbol == _THERMAL:
            return Unit(BOLTZMANN * self._temperature(symbol) / E_CHARGE, _VOLT)
        known = [*_SYMBOLS, *_PRESSURES_PA, _THERMAL]
        raise UnitError(
            f'unit "{self.text}": {symbol} is unknown.{suggestion(symbol, known)} Known: {", ".join(known)}.'
        )

    def _temperature(self, symbol: str) -> float:
        if self.temperature_K is None:
            raise UnitError(
                f'unit "{self.text}": {symbol} depends on the temperature. Was the gas at room temperature, or the '
                'pressure reduced to 0 C? Give temperature_K, or write the unit with "at 273.15 K".'
            )
        return self.temperature_K


_HOW_TO_WRITE = "Write it like cm2/s, 1e-20 m2, V/(cm Torr) or cm-1 Torr-1."


def _density(unit: str, wanted: str, temperature_K: float | None, pressure_Pa: float | None) -> float:
    if temperature_K is None or pressure_Pa is None:
        raise UnitError(
            f'unit "{unit}" becomes {wanted} only with the density of the gas. Give temperature_K and pressure_Pa, '
            "or a number that is already reduced."
        )
    return pressure_Pa / (BOLTZMANN * temperature_K)
