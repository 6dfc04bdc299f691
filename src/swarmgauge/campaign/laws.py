"""Which processes scatter or share energy other than by default, in words."""

from collections.abc import Iterator

from swarmgauge.gas import Isotropic, Mixture, Sharing


def special_laws(mixture: Mixture) -> Iterator[str]:
    """A line for each acting process with an angular law, ejecta or a sharing of energy other than by default."""
    for gas in mixture.gases:
        for process in mixture.acting(gas):
            laws = []
            if not isinstance(process.scattering, Isotropic):
                laws.append(
                    f"scattering by {process.scattering}" + (", converted" if process.scattering.convert else "")
                )
            if process.ejecta != "isotropic":
                laws.append(f"{process.ejecta} ejecta")
            if process.sharing != Sharing():
                laws.append(f"energy shared {process.sharing}")
            if laws and not process.passive:
                yield f"{gas.name}/{process.id}: {', '.join(laws)}"
