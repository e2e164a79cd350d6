"""The dipole's terminals in a uniform field against antenna theory and the integral equation."""

import numpy as np
import pytest

from models.conventions import ETA0
from models.dipole_port import at_terminals, two_port
from models.moment_wire import gap_share, rod

RNG = np.random.default_rng(5)


@pytest.mark.parametrize(("ratio", "close"), [(5000.0, 0.005), (25.0, 0.02)])
def test_effective_length_gives_the_directivity(ratio: float, close: float) -> None:
    # D = η|ℓ|²/(4πR) for lengths in 1/k: 1.641 of a half-wave dipole (Balanis, §4.6).
    own, length, _ = two_port(np.array([np.pi]), np.array([np.pi / (2.0 * ratio)]))[:, 0]
    assert ETA0 / (4.0 * np.pi) * abs(length) ** 2 / own.real == pytest.approx(1.641, rel=close)


def test_shorted_dipole_scatters_what_a_matched_pair_would() -> None:
    # At resonance a shorted dipole has a cross section of D²λ²/π = 0.86 λ² (Balanis, §2.15 to
    # 2.17: all of the available power comes back, four times).
    k_length = np.linspace(0.85, 1.0, 301) * np.pi
    own, length, admittance = two_port(k_length, k_length / 1000.0)
    at = np.abs(own.imag).argmin()
    moment = admittance[at] + length[at] ** 2 / own[at]
    section = ETA0**2 * abs(moment) ** 2 / (4.0 * np.pi)
    assert section / (2.0 * np.pi) ** 2 == pytest.approx(1.641**2 / np.pi, rel=0.05)


@pytest.mark.parametrize("slim", [2e-5, 1e-3, 0.02, 0.04])
def test_uniform_field_of_plates(slim: float) -> None:
    # The same by the whole matrix: plates that put −c·∫I dz along the wire add c·uuᵀ. The slimmest
    # and the thickest lie beyond the table.
    k_length = RNG.uniform(0.75, 1.25, 20) * np.pi
    added = (60.0 * RNG.normal(size=(20, 2))).view(np.complex128)[:, 0]
    wire = rod(k=np.ones(20), length=k_length, radius=slim * k_length)
    field = added / (2.0 * (1.0 - np.cos(k_length / 2.0))) ** 2
    whole, gap = wire.currents_within(wire.length), gap_share(wire)
    matrix = wire.impedance() + field[:, None, None] * whole[:, :, None] * whole[:, None, :]
    driven = np.linalg.solve(matrix, gap[..., None] + 0j)[..., 0]
    current = (gap * driven).sum(axis=1)
    impedance, maximum = at_terminals(added, k_length, slim * k_length)
    np.testing.assert_allclose(impedance, 1.0 / current, rtol=6e-3)
    moment = 2.0 * (1.0 - np.cos(k_length / 2.0)) * maximum
    np.testing.assert_allclose(moment, (whole * driven).sum(axis=1) / current, rtol=6e-3)
