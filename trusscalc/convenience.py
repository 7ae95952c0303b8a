"""A base for records that can show, cut or save themselves without knowing how.

The methods live above the records (drawing a truss needs the whole of ``sheet`` and ``render``), so they are
hung on the classes by ``trusscalc.display``, which is loaded when one of them is first asked for.
"""

from __future__ import annotations

from importlib import import_module
from typing import Any

OFFERED = frozenset({"cut", "derivation", "equation", "explore", "report", "save", "sheet", "_repr_mimebundle_"})
"""Names that ``trusscalc.display`` may hang on a record."""


class Convenient:
    """A record whose conveniences are attached when first asked for."""

    __slots__ = ()

    def __getattr__(self, name: str) -> Any:
        """Attach the conveniences, and return the one asked for if this record has it."""
        if name in OFFERED:
            import_module("trusscalc.display").attach()
            found = getattr(type(self), name, None)
            if found is not None:
                return found.__get__(self)
        message = f"{type(self).__name__!r} object has no attribute {name!r}"
        raise AttributeError(message)
