"""Changes of shape: inversion, rotation, bending."""

import numpy as np
import pytest

from rateloom.molecule.bonds import atomic_numbers, bonds
from rateloom.molecule.internals import Coordinate, gradients
from rateloom.molecule.isotopes import atomic_masses
from rateloom.molecule.matching import Pattern, pattern
from rateloom.molecule.shapes import describe_shape_change, shape_change

MIRROR = np.array([-1.0, 1.0, 1.0])


def _chain(torsion: float) -> np.ndarray:
    """H-O-O-H with O-O 1.45, O-H 0.97 angstrom, angles of 100 degrees, as in hydrogen peroxide."""
    bend, turn = np.deg2rad(100), np.deg2rad(torsion)
    across, along = 0.97 * np.sin(bend), 0.97 * np.cos(bend)
    end = [across * np.cos(turn), across * np.sin(turn), 1.45 - along]
    return np.array([[across, 0, along], [0, 0, 0], [0, 0, 1.45], end])


def _pyramid(height: float) -> np.ndarray:
    return np.array(
        [[0, 0, height]] + [[0.95 * np.cos(a), 0.95 * np.sin(a), 0] for a in 2 * np.pi * np.arange(3) / 3]
    )


def _pattern(atoms: str, geometry: np.ndarray) -> Pattern:
    return pattern(atomic_numbers(list(atoms)), bonds(list(atoms), geometry))


def _along(saddle: np.ndarray, coordinate: Coordinate) -> np.ndarray:
    """Mode in which all kinetic energy is in one coordinate: its gradient over the masses."""
    return gradients(saddle, [coordinate], saddle)[0] / atomic_masses(tuple("HOOH"))[:, np.newaxis]


def _judge(atoms: str, saddle: np.ndarray, mode: np.ndarray, minima: list[np.ndarray]):  # type: ignore[no-untyped-def]
    given = [(_pattern(atoms, minimum), minimum) for minimum in minima]
    return shape_change(_pattern(atoms, saddle), saddle, mode, atomic_masses(tuple(atoms)), given)


@pytest.mark.parametrize("top", [0.0, 180.0])
def test_rotation_through_a_planar_saddle_leads_to_either_mirror_image(top: float) -> None:
    saddle = _chain(top)
    torsion = Coordinate("torsion", (0, 1, 2, 3))
    mode = _along(saddle, torsion)

    for product in (_chain(-112), _chain(112), _chain(112) * MIRROR):
        change = _judge("HOOH", saddle, mode, [_chain(112), product])

        assert change.moving == (torsion,)
        assert np.rad2deg(change.amount) == pytest.approx(112 if top == 0.0 else 68)
        assert change.share == pytest.approx(1.0)
        assert change.opposite
        assert describe_shape_change(change) == "internal rotation"


def test_rotation_from_one_isomer_to_another_has_them_on_opposite_sides() -> None:
    saddle = _chain(90)
    mode = _along(saddle, Coordinate("torsion", (0, 1, 2, 3)))

    assert _judge("HOOH", saddle, mode, [_chain(180), _chain(0)]).opposite
    assert not _judge("HOOH", saddle, mode, [_chain(180), _chain(150)]).opposite


def test_inversion_moves_an_atom_through_the_plane() -> None:
    flat = _pyramid(0.0)
    mode = np.array([[0, 0, 3.0], [0, 0, -14.0], [0, 0, -14.0], [0, 0, -14.0]])

    change = _judge("NHHH", flat, mode, [_pyramid(0.35), _pyramid(-0.35)])

    assert describe_shape_change(change) == "inversion"
    assert change.share > 0.9
    assert change.opposite


def test_a_stretch_has_no_share_in_a_rotation() -> None:
    saddle = _chain(0)
    stretch = np.array([[0, 0, 0], [0, 0, -1.0], [0, 0, 1.0], [0, 0, 0]])

    assert _judge("HOOH", saddle, stretch, [_chain(112), _chain(-112)]).share < 0.01


def test_a_saddle_like_its_minima_has_nothing_to_move() -> None:
    saddle = _chain(112)

    change = _judge("HOOH", saddle, saddle, [_chain(112), _chain(115)])

    assert change.moving == ()
    assert describe_shape_change(change) == "change of shape"
