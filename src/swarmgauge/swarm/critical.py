"""The critical field, where as many electrons are born as are lost."""

from dataclasses import dataclass

from scipy.optimize import brentq

from swarmgauge.gas import InputError, Mixture

from .estimate import Estimate
from .field import Field
from .schedule import simulate
from .two_term import solve_two_term

LOWEST_TD, HIGHEST_TD, STEP = 1.0, 5000.0, 1.25  # fields that are searched, by two-term
CELLS = 200  # of the two-term solutions: the root is only a start
SPREAD = 0.01  # of the field, between the middle and either end of the line that is drawn through the root
MOST_MOVES = 4
NET = "net_frequency_over_N"


@dataclass(frozen=True)
class _Line:
    """Net frequency at two fields, and the root of the line through them."""

    fields: tuple[float, float]
    ends: tuple[Estimate, Estimate]

    @property
    def root(self) -> Estimate:
        """The field, Td, with the error that both ends leave to it."""
        low, high = self.ends
        slope = (high.value - low.value) / (self.fields[1] - self.fields[0])
        part = -low.value / (high.value - low.value)
        error = ((1.0 - part) ** 2 * low.standard_error**2 + part**2 * high.standard_error**2) ** 0.5 / abs(slope)
        value = self.fields[0] + part * (self.fields[1] - self.fields[0])
        return Estimate(value, error, "Td", min(low.samples, high.samples))


def critical_field(
    mixture: Mixture, *, accuracy: float = 0.002, seed: int = 1, workers: int | None = None, max_minutes: float = 5.0
) -> Estimate:
    """The reduced field, Td, at which ionization and attachment balance, with its standard error.

    There the net rate of the swarm in time vanishes, and with it the growth in space: alpha = 0 is a root of the growth
    exponent exactly where R = 0, so that alpha = eta at the same field. If there are several, the highest.
    A two-term root is the start; the Monte Carlo value is the root of a line through net frequencies at fields 1 %
    below and above, drawn anew until it lies between them. accuracy : wanted relative standard error; max_minutes :
    wall clock for each of the fields.
    Raises InputError where the net frequency does not change its sign between 1 and 5000 Td, or runs out of time.
    """
    middle = _two_term_root(mixture)
    for move in range(MOST_MOVES):
        fields = (middle * (1.0 - SPREAD), middle * (1.0 + SPREAD))
        wanted = accuracy * middle * abs(_net(mixture, fields[1]) - _net(mixture, fields[0])) / (fields[1] - fields[0])
        ends = []
        for place, field in enumerate(fields):
            point = simulate(
                mixture,
                Field(field),
                accuracy={NET: {"abs": wanted}},
                seed=seed + 2 * move + place,
                workers=workers,
                max_minutes=max_minutes,
            )
            if point.status != "done":
                raise InputError(f"{field:.4g} Td: {point.status}. Ask for less accuracy or allow more minutes.")
            ends.append(point[NET])
        root = _Line(fields, (ends[0], ends[1])).root
        if abs(root.value - middle) < SPREAD * middle + root.standard_error:
            return root
        middle = root.value
    raise InputError(f"no critical field found near {middle:.4g} Td in {MOST_MOVES} steps.")


def _net(mixture: Mixture, E_over_N_Td: float) -> float:
    return solve_two_term(mixture, E_over_N_Td, cells=CELLS).values.get(NET, 0.0)


def _two_term_root(mixture: Mixture) -> float:
    """The highest field where the two-term net frequency passes from loss to gain."""
    fields = [LOWEST_TD]
    while fields[-1] < HIGHEST_TD:
        fields.append(STEP * fields[-1])
    signs = [_net(mixture, field) > 0.0 for field in fields]
    losing = [place for place, gains in enumerate(signs[:-1]) if not gains and signs[place + 1]]
    if not losing or _net(mixture, fields[losing[-1]]) == 0.0:
        raise InputError(
            f"no critical field: the net frequency does not pass from loss to gain between {LOWEST_TD:g} and "
            f"{HIGHEST_TD:g} Td. It needs a mixture with attachment and ionization."
        )
    low, high = fields[losing[-1]], fields[losing[-1] + 1]
    return float(f"{brentq(lambda field: _net(mixture, field), low, high, rtol=1e-4):.4g}")
