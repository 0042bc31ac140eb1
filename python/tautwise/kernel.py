"""The array kernel: many spans under uniform load settled at once, in exact closed form.

Each item is the elastic catenary (Irvine, Cable Structures, 1981, ch. 1) in the plane of its resultant load, with
strain = T / EA + e0 on the natural length. Arguments broadcast like NumPy's; arithmetic is float64 in SI. The GIL is
released. An item that cannot be settled gives NaN and its status, and one warning counts all of them.
"""

from __future__ import annotations

import warnings
from collections import Counter
from dataclasses import dataclass
from functools import cache
from typing import TYPE_CHECKING, Any

from tautwise.columns import plural

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import ArrayLike, NDArray

    Floats = NDArray[np.float64]


class SpanWarning(RuntimeWarning):
    """Some items of an array could not be settled."""


@dataclass(frozen=True, slots=True, eq=False)
class SpanStates:
    """Settled spans, an array for each quantity, all of the broadcast shape; NaN where `status` is not 0.

    Fields
    ------
    horizontal_tension: tension component along the span's plan direction, N.
    tension_from, tension_to: tension magnitude at both ends, N.
    sag: greatest vertical distance from the chord down to the line, m.
    slant_sag: greatest distance from the chord in the direction of the resultant load, m.
    line_length: stretched length, m.
    status: 0 where settled; `status_names` says what the others mean.
    """

    horizontal_tension: Floats
    tension_from: Floats
    tension_to: Floats
    sag: Floats
    slant_sag: Floats
    line_length: Floats
    status: NDArray[np.int32]

    def __post_init__(self) -> None:
        for name in self.__slots__:
            getattr(self, name).setflags(write=False)

    @property
    def settled(self) -> NDArray[np.bool_]:
        """Where the status is 0."""
        import numpy as np

        return np.equal(self.status, 0)

    def __eq__(self, other: object) -> bool:
        import numpy as np

        if not isinstance(other, SpanStates):
            return NotImplemented
        return all(np.array_equal(getattr(self, name), getattr(other, name), equal_nan=True) for name in self.__slots__)

    __hash__ = None  # type: ignore[assignment]

    def __repr__(self) -> str:
        import numpy as np

        count, failed = self.status.size, int(np.count_nonzero(self.status))
        shape = " x ".join(map(str, self.status.shape)) or "1"
        lines = [f"SpanStates of shape {shape}: {count - failed} settled, {failed} not"]
        return "\n".join([*lines, *(_range_line(self, name) for name in self.__slots__[:-1] if failed < count)])


def settle_spans(
    span: ArrayLike,
    rise: ArrayLike,
    natural_length: ArrayLike,
    stiffness: ArrayLike,
    weight: ArrayLike,
    across: ArrayLike = 0.0,
    strain: ArrayLike = 0.0,
) -> SpanStates:
    """Settle uniform spans of known natural length.

    Parameters
    ----------
    span: plan distance between the ends, m, > 0. rise: far end above near end, m.
    natural_length: unstressed at the reference temperature, m, > 0.
    stiffness: EA, N, > 0.
    weight, across: load per natural metre, down and horizontally across, N/m.
    strain: expansion plus creep (e0).

    Returns
    -------
    The states, in arrays that cannot be written to.

    Raises
    ------
    InputError: an argument is a masked array.

    Warns
    -----
    SpanWarning: how many items are not settled, and why.

    Examples
    --------
    >>> states = settle_spans(300.0, 0.0, [300.8, 299.5], 34.7e6, 15.97)
    >>> states.horizontal_tension.round(4).tolist()
    [17368.8077, 65609.3449]
    >>> states.status.tolist()
    [0, 0]
    """
    from tautwise import _core

    _refuse_masked(
        span=span, rise=rise, natural_length=natural_length, stiffness=stiffness, weight=weight, across=across,
        strain=strain,
    )  # fmt: skip
    answer = SpanStates(*_core.settle_spans(span, rise, natural_length, stiffness, weight, across, strain))
    _warn(answer.status)
    return answer


def natural_length(
    span: ArrayLike,
    rise: ArrayLike,
    horizontal_tension: ArrayLike,
    stiffness: ArrayLike,
    weight: ArrayLike,
    across: ArrayLike = 0.0,
    strain: ArrayLike = 0.0,
) -> Floats:
    """The natural length, m, with which uniform spans settle at a horizontal tension.

    Parameters
    ----------
    horizontal_tension: tension component along the span's plan direction, N, > 0. The others as in `settle_spans`.

    Warns
    -----
    SpanWarning: how many items have no such length, and why; they give NaN.

    Examples
    --------
    >>> round(float(natural_length(300.0, 0.0, 17368.8076566, 34.7e6, 15.97)), 8)
    300.8
    """
    from tautwise import _core

    _refuse_masked(
        span=span, rise=rise, horizontal_tension=horizontal_tension, stiffness=stiffness, weight=weight, across=across,
        strain=strain,
    )  # fmt: skip
    length, status = _core.natural_length(span, rise, horizontal_tension, stiffness, weight, across, strain)
    _warn(status)
    return length  # type: ignore[no-any-return]


def status_names() -> dict[int, str]:
    """The name of each value of `SpanStates.status`: 0 and above are outcomes, below 0 are errors.

    >>> status_names()[0]
    'ok'
    """
    return dict(_status_names())


@cache
def _status_names() -> tuple[tuple[int, str], ...]:
    from tautwise import _core

    outcomes = [name for name in _core.STATUS if not name.startswith("error_")]
    errors = [name for name in _core.STATUS if name.startswith("error_")]
    return (*enumerate(outcomes), *((-number, name) for number, name in enumerate(errors, start=1)))


def _refuse_masked(**arguments: Any) -> None:
    """A mask would be dropped without a word, and what it hides settled."""
    import numpy as np

    from tautwise.errors import Fault, InputError

    masked = [name for name, value in arguments.items() if isinstance(value, np.ma.MaskedArray)]
    if masked:
        example = "values.filled(numpy.nan)"
        raise InputError([Fault(None, None, name, "a masked array", "a plain one", example) for name in masked])


def _warn(status: Any) -> None:
    import numpy as np

    codes, counts = np.unique(status, return_counts=True)
    failed = Counter(dict(zip(codes.tolist(), counts.tolist(), strict=True)))
    failed.pop(0, None)
    if failed:
        names = status_names()
        reasons = ", ".join(f"{count}: {names.get(code, code)}" for code, count in failed.most_common())
        message = f"{failed.total()} of {plural(np.size(status), 'span')} not settled ({reasons})"
        warnings.warn(message, SpanWarning, stacklevel=3)


def _range_line(states: SpanStates, name: str) -> str:
    import numpy as np

    values = getattr(states, name)
    return f"  {name}: {np.nanmin(values):.6g} to {np.nanmax(values):.6g}"
