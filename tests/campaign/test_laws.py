"""What a run says about its laws."""

from swarmgauge.campaign.laws import special_laws
from swarmgauge.gas import Forward, Gas, Mixture, PowerLaw, Process, Screened, Sharing


def process(name, kind, threshold, **more):
    return Process(name, kind, threshold, PowerLaw(1e-20, 0.0), **more)


def test_laws_other_than_the_default_ones_are_told():
    gas = Gas(
        "toy",
        "X",
        4.0,
        "momentum_transfer",
        (
            process("elastic", "elastic", 0.0, scattering=Screened([0.0], [0.5], convert=True)),
            process("far", "excitation", 8.0, scattering=Forward()),
            process("near", "excitation", 9.0),
            process("ion", "ionization", 15.0, sharing=Sharing("width", width_eV=10.0), ejecta="binary"),
            process("seen", "excitation", 16.0, scattering=Forward(), passive=True),
        ),
    )
    assert list(special_laws(Mixture({gas: 1.0}))) == [
        "toy/elastic: scattering by the screened Coulomb form, xi = 0.5, converted",
        "toy/far: scattering by the forward law",
        "toy/ion: binary ejecta, energy shared by the published form of width 10 eV",
    ]
    assert list(special_laws(Mixture({"argon-yamabe1983": 1.0}))) == []
