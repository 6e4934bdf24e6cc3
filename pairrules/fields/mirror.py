"""Finds the axis of a cross-section that is its own mirror image left to right, so that one half of it may be solved.

Charges of such a section are the sum of an even part and an odd one, each of which is known from its left half: two
systems of half the size take a quarter of the time, and the two halves come out equal to the last digit but one.
"""

from __future__ import annotations

import dataclasses
from dataclasses import dataclass

import numpy as np

from pairrules.fields.boundary import INTERFACE, Bools, Complexes, Ints, Pieces

_TOUCH = 2e-9  # as share of the region's size


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Mirror:
    """The axis x [region's scale], and for each conductor of the section the place of its image (conductors,)."""

    axis: float
    image: Ints


def mirror_of(pieces: Pieces, conductors: int) -> Mirror | None:
    """The axis across which every piece has its image, dielectrics and all; `None` where there is no such axis."""
    copper = pieces.owner != INTERFACE
    ends = np.stack((pieces.start, pieces.end))
    across = ends[:, copper][~pieces.far[copper].T].real
    if not len(across):
        return None
    axis = float(across.min() + across.max()) / 2.0
    if np.any(np.all(np.abs(ends.real - axis) < _TOUCH, axis=0)):
        return None  # a piece on the axis belongs to neither half
    start, end = (2.0 * axis - ends).real + 1j * ends.imag
    sides = np.nan_to_num(np.stack((pieces.left, pieces.right)))

    def alike(one: Complexes, other: Complexes) -> Bools:
        near: Bools = np.abs(one[:, None] - other[None, :]) < _TOUCH
        return near

    # images keep their way or are turned about; a mirror swaps left and right, and so does turning about
    turned = alike(start, pieces.end) & alike(end, pieces.start)
    kept = alike(start, pieces.start) & alike(end, pieces.end)
    turned &= np.all(sides[:, :, None] == sides[:, None, :], axis=0)
    kept &= np.all(sides[:, :, None] == sides[::-1, None, :], axis=0)
    matches = turned | kept
    if not np.all(np.count_nonzero(matches, axis=1) == 1):
        return None
    owner, of_image = pieces.owner, pieces.owner[np.argmax(matches, axis=1)]
    image = np.arange(conductors)
    image[owner[owner >= 0]] = of_image[owner >= 0]
    same_kind = np.all((owner >= 0) == (of_image >= 0)) and np.all((owner == of_image) | (owner >= 0))
    consistent = np.all(image[image] == np.arange(conductors)) and np.all(
        image[owner[owner >= 0]] == of_image[owner >= 0]
    )
    return Mirror(axis=axis, image=image) if same_kind and consistent else None


def cut_at(pieces: Pieces, axis: float) -> Pieces:
    """The pieces, those across the axis cut in two there."""
    low, high = np.minimum(pieces.start.real, pieces.end.real), np.maximum(pieces.start.real, pieces.end.real)
    over = (low < axis - _TOUCH) & (high > axis + _TOUCH)
    if not np.any(over):
        return pieces
    crossing = pieces.of(over)
    share = (axis - crossing.start.real) / (crossing.end.real - crossing.start.real)
    middle: Complexes = np.empty_like(crossing.start)
    middle.real, middle.imag = axis, crossing.start.imag + share * (crossing.end.imag - crossing.start.imag)
    near = np.zeros(len(middle), dtype=np.bool_)
    before = dataclasses.replace(crossing, end=middle, far=np.stack((crossing.far[:, 0], near), axis=1))
    after = dataclasses.replace(crossing, start=middle, far=np.stack((near, crossing.far[:, 1]), axis=1))
    parts = (pieces.of(~over), before, after)
    return Pieces(
        start=np.concatenate([part.start for part in parts]),
        end=np.concatenate([part.end for part in parts]),
        owner=np.concatenate([part.owner for part in parts]),
        left=np.concatenate([part.left for part in parts]),
        right=np.concatenate([part.right for part in parts]),
        far=np.concatenate([part.far for part in parts]),
        contacts=pieces.contacts,
    )
