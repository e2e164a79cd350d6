"""The dipole alone against finite elements, solved here and now.

By a general-purpose library, NGSolve. A solid rod with flat ends in free space: no thin wire, no
Green's function. By symmetry about the axis all is in U = ρH_φ, which obeys ∇·(∇U/ρ) + k²U/ρ = 0
off the rod; one quarter of a half-plane is meshed. The voltage lies on the rod's side over a gap
one diameter long, and the admittance is the weak form's own product of gap and current, so it
converges twice as fast as the field. A shell of complex radius ends the space. Lengths in
wavelengths.

Accuracy, measured at half a wavelength and a length/diameter of 50, 97.45 + j48.43 Ω: order 7,
elements half as long at gap and end, or a third shorter elsewhere move it by 0.005 Ω; a layer 0.3
thicker, or 0.15 farther out, by 0.03 Ω. A gap half as long gives 98.85 + j47.30 Ω, twice as long
95.81 + j49.72 Ω, all three the same conductance within 0.1 %.
"""

import netgen.occ as occ
import ngsolve as ng
import numpy as np
import pytest

from models.conventions import ETA0
from models.moment_wire import driven_shapes, gap_share, rod

K = 2.0 * np.pi
AIR, LAYER, STRETCH = 0.25, 0.5, 1.0 - 1.5j
SIZE, ORDER = 0.15, 5


def quarter_plane(half: float, radius: float, gap: float) -> ng.Mesh:
    """Return air and layer around the upper half of a rod; edges `gap` (its half) and `axis`."""
    quarter = occ.MoveTo(0, 0).Rectangle(9, 9).Face()
    air = occ.WorkPlane().Circle(0, 0, half + AIR).Face() * quarter
    layer = occ.WorkPlane().Circle(0, 0, half + AIR + LAYER).Face() * quarter - air
    air = air - occ.MoveTo(0, 0).Rectangle(radius, half).Face()
    at_gap = occ.MoveTo(radius, 0).Rectangle(3 * radius, gap / 2).Face()
    parts = [at_gap, air - at_gap, layer]
    for part, name in zip(parts, ("air", "air", "layer"), strict=True):
        part.faces.name = name
    shape = occ.Glue(parts)
    for edge in shape.edges:
        rho, z = edge.center.x, edge.center.y
        if rho < 1e-9:
            edge.name = "axis"
        elif abs(rho - radius) < 1e-9 and z < gap / 2:
            edge.name, edge.maxh = "gap", min(gap / 4, radius / 2)
        elif abs(rho - radius) < 1e-9 and z < half:
            edge.maxh = 3 * radius
    for vertex in shape.vertices:
        if abs(vertex.p.x - radius) < 1e-9 and vertex.p.y > 1e-9:
            vertex.maxh = radius / 8
    mesh = ng.Mesh(occ.OCCGeometry(shape, dim=2).GenerateMesh(maxh=SIZE, grading=0.4))
    mesh.Curve(ORDER)
    return mesh


def finite_elements(length: float, ratio: float, *, gap_radii: float = 2.0) -> complex:
    """Return the impedance of a solid rod of this length and length/diameter, Ω."""
    half, radius = length / 2.0, length / (2.0 * ratio)
    gap, start = gap_radii * radius, half + AIR
    mesh = quarter_plane(half, radius, gap)
    space = ng.H1(mesh, order=ORDER, complex=True, dirichlet="axis")
    u, v = space.TnT()
    distance = ng.sqrt(ng.x**2 + ng.y**2)
    # In the layer the distance from the origin is complex: its slope and its ratio to the real one.
    slope = mesh.MaterialCF({"layer": STRETCH}, default=1.0)
    longer = (start + STRETCH * (distance - start)) / distance
    scale = mesh.MaterialCF({"layer": longer}, default=1.0)
    outward, around = ng.CF((ng.x, ng.y)) / distance, ng.CF((-ng.y, ng.x)) / distance
    form = ng.BilinearForm(space, symmetric=True)
    radial = (ng.grad(u) * outward) * (ng.grad(v) * outward) / slope
    angular = (ng.grad(u) * around) * (ng.grad(v) * around) * slope / scale**2
    form += (radial + angular - K**2 * slope * u * v) / ng.x * ng.dx(bonus_intorder=8)
    load = ng.LinearForm(space)
    load += v * ng.ds("gap")
    form.Assemble()
    load.Assemble()
    solution = load.vec.CreateVector()
    solution.data = form.mat.Inverse(space.FreeDofs(), inverse="sparsecholesky") * load.vec
    # For 1 V the load is jk/η over the gap's length, and so is the mean of 2πU over both halves.
    product = ng.InnerProduct(load.vec, solution, conjugate=False)
    return 1.0 / complex(4.0 * np.pi * 1j * K / ETA0 / gap**2 * product)


@pytest.mark.parametrize("ratio", [15.0, 50.0, 500.0])
@pytest.mark.parametrize("length", [0.42, 0.47, 0.52])
def test_impedance(length: float, ratio: float) -> None:
    one = np.ones(1)
    wire = rod(k=K * one, length=length * one, radius=length / (2.0 * ratio) * one)
    driven = driven_shapes(wire, wire.impedance())[0, :, 0]
    here, there = 1.0 / (gap_share(wire)[0] @ driven), finite_elements(length, ratio)
    assert here.real == pytest.approx(there.real, rel=0.012)
    assert abs(here - there) < 0.01 * abs(there)


def test_gap_moves_susceptance_only() -> None:
    # What the wire's text says of its gap: 5e-3·ka S more for half the length.
    short, usual = (1.0 / finite_elements(0.5, 50.0, gap_radii=g) for g in (1.0, 2.0))
    assert short.real == pytest.approx(usual.real, rel=2e-3)
    assert (short - usual).imag / (K * 0.005) == pytest.approx(5e-3, rel=0.1)
