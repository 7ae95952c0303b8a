"""Errors of trusscalc: one base class, each error also the builtin a caller would expect.

Every message says what is wrong, where, and what to do. A failed cross-check is not an error: it is a
verdict, which the sheet must show.
"""

from __future__ import annotations

from collections.abc import Sequence


class TrusscalcError(Exception):
    """Base of every error raised on purpose by this package."""


class TrusscalcWarning(UserWarning):
    """Something an engineer should look at, though the work can go on."""


class InputError(TrusscalcError, ValueError):
    """The stated truss, loads or request cannot be right.

    Attributes
    ----------
    problems : tuple of str
        Every problem found, each naming what, where and what to do.
    """

    def __init__(self, problems: str | Sequence[str]) -> None:
        self.problems: tuple[str, ...] = (problems,) if isinstance(problems, str) else tuple(problems)
        super().__init__("\n".join(self.problems))


class UnknownNameError(TrusscalcError, KeyError):
    """A joint, member, case or symbol was asked for that is not there.

    Attributes
    ----------
    name : str
        The name as asked for.
    """

    def __init__(self, message: str, *, name: str) -> None:
        self.name = name
        self.message = message
        super().__init__(message)

    def __str__(self) -> str:
        """Return the message itself (a KeyError would show its repr)."""
        return self.message


class InexactNumberError(TrusscalcError, ValueError):
    """A number that cannot be held exactly, or text that is no number at all."""


class UnitError(TrusscalcError, ValueError):
    """A unit that is not in the table, or two units of different kinds."""


class FileFormatError(InputError):
    """A truss file that cannot be read.

    Attributes
    ----------
    source : str
        The file the problems are in.
    """

    def __init__(self, problems: str | Sequence[str], *, source: str = "") -> None:
        self.source = source
        listed = (problems,) if isinstance(problems, str) else tuple(problems)
        super().__init__([f"{source}: {problem}" if source else problem for problem in listed])


class UnstableTrussError(TrusscalcError, ValueError):
    """The truss cannot resist every load: its equilibrium matrix is short of rank.

    Attributes
    ----------
    joints : tuple of str
        The joints that move in the mechanism.
    mechanism : dict of str to tuple of float
        A displacement of each moving joint, largest component 1 (no unit: only its shape means something).
    truss : Truss or None
        The truss that moves, so that a notebook can draw the mechanism of a caught error.
    """

    def __init__(
        self,
        message: str,
        *,
        joints: Sequence[str],
        mechanism: dict[str, tuple[float, float]],
        truss: object = None,
    ) -> None:
        self.joints = tuple(joints)
        self.mechanism = dict(mechanism)
        self.truss = truss
        super().__init__(message)


class NoCutError(TrusscalcError, ValueError):
    """No free body with a single equation reaches a wanted member.

    Attributes
    ----------
    members : tuple of str
        The members that cannot be reached.
    """

    def __init__(self, message: str, *, members: Sequence[str]) -> None:
        self.members = tuple(members)
        super().__init__(message)


class UndecidedError(TrusscalcError, ValueError):
    """A force was asked for that statics alone does not decide.

    Attributes
    ----------
    name : str
        The member, reaction or shear, as the truss spells it.
    """

    def __init__(self, message: str, *, name: str) -> None:
        self.name = name
        super().__init__(message)


class RenderError(TrusscalcError, ValueError):
    """A sheet that cannot be drawn or written as asked."""
