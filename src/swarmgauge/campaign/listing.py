"""The shipped sets as a list, as text or for JSON."""

from collections.abc import Iterator
from typing import Any

from swarmgauge.gas import Gas, load_named, shipped_sets


def sets_table() -> Iterator[str]:
    """One line per shipped set, under a head."""
    yield f"{'set':<33}{'gas':<6}{'elastic_is':<19}{'processes':>9}  trusted Td"
    for name in shipped_sets():
        gas = load_named(name)
        yield f"{name:<33}{gas.formula:<6}{gas.elastic_is:<24}{len(gas.processes):>4}  {_trusted(gas)}"


def sets_json() -> list[dict[str, Any]]:
    """The shipped sets, with their sources."""
    return [_set_json(load_named(name)) for name in shipped_sets()]


def _set_json(gas: Gas) -> dict[str, Any]:
    return {
        "name": gas.name,
        "formula": gas.formula,
        "elastic_is": gas.elastic_is,
        "processes": len(gas.processes),
        "trusted_E_over_N_Td": gas.trusted_E_over_N_Td,
        "source": gas.source,
        "rights": gas.rights,
    }


def _trusted(gas: Gas) -> str:
    if gas.trusted_E_over_N_Td is None:
        return "-"
    low, high = gas.trusted_E_over_N_Td
    return f"{low:g} to {high:g}"
