"""Results that cannot be changed: freezing a dataclass does not freeze its arrays."""

from __future__ import annotations

from dataclasses import fields
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from _typeshed import DataclassInstance


def freeze_arrays(result: DataclassInstance) -> None:
    """Replace the arrays of a frozen dataclass by read-only copies; for its `__post_init__`.

    Parameters
    ----------
    result : dataclass instance
        Whose fields that hold arrays are replaced.
    """
    for field in fields(result):
        value = getattr(result, field.name)
        if isinstance(value, np.ndarray):
            copy = value.copy()
            copy.flags.writeable = False
            object.__setattr__(result, field.name, copy)
