"""What the tests share: an invented stackup, a via on it, a link."""

from pathlib import Path

import pytest

import libstub as ls

ROOT = Path(__file__).resolve().parents[2]
SHARED = ROOT.parent / "shared"


@pytest.fixture(scope="session")
def laminate():
    return ls.Dielectric(3.6, 0.004, in_plane_ratio=1.15)


def make_stackup(laminate, spacing=ls.mil(8)):
    """Ten copper layers, every second one a plane."""
    layers = []
    for i in range(1, 11):
        layers.append(ls.Layer(f"L{i}", "plane" if i in (2, 4, 6, 8) else "signal", ls.um(18)))
        if i < 10:
            layers.append(
                ls.Layer(f"D{i}", "dielectric", spacing, tol_plus=ls.mil(0.5), tol_minus=ls.mil(0.5), dielectric=laminate)
            )
    return ls.Stackup(layers)


@pytest.fixture(scope="session")
def stackup(laminate):
    return make_stackup(laminate)


@pytest.fixture(scope="session")
def other_stackup(laminate):
    return make_stackup(laminate, ls.mil(6))


@pytest.fixture(scope="session")
def via(stackup):
    return make_via(stackup)


def make_via(stackup, **changes):
    arguments = dict(drill=ls.mil(10), pad=ls.mil(20), antipad=ls.mil(30), connects=("L1", "L3"), returns=ls.Ring(4, ls.mil(40)))
    return ls.Via(stackup, **{**arguments, **changes})


@pytest.fixture(scope="session")
def model(via):
    return via.model()


@pytest.fixture(scope="session")
def slow():
    """A link that is well within the range of the model."""
    return ls.Signal(baud=ls.gbd(10.3125))


@pytest.fixture(scope="session")
def fast():
    return ls.Signal(baud=ls.gbd(25.78125))


@pytest.fixture(scope="session")
def criteria():
    return ls.Criteria(notch_over_nyquist=2.0, added_loss_db=0.5)


@pytest.fixture(scope="session")
def capability():
    return ls.Capability(
        depth_tolerance=ls.mil(2), cut_clearance=ls.mil(3), residual_min=ls.mil(2), residual_target=ls.mil(5),
        bit_oversize=ls.mil(8), wall_clearance=ls.mil(3),
    )
