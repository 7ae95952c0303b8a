"""A train moved by hand over an influence line: where it stands, what that gives, and where it governs."""

from __future__ import annotations

import threading
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import Any, Final

from trusscalc.errors import InputError, UnknownNameError
from trusscalc.exact import Exact, exact
from trusscalc.exacttext import number
from trusscalc.influence import InfluenceLine
from trusscalc.loads import LoadCase
from trusscalc.render.notebook import Bundle, bundle
from trusscalc.sheet.blocks import Block, Column, Decimals, Heading, Inline, Paragraph, Picture, Run, Table
from trusscalc.sheet.influencefigure import influence_figure, target_words
from trusscalc.sheet.inscriptions import amount
from trusscalc.sheet.values import decimal_text, told
from trusscalc.sheet.words import capital, listed
from trusscalc.trains import Train
from trusscalc.travel import Direction, Extreme, extremes
from trusscalc.truss import did_you_mean
from trusscalc.widgets.cutblocks import note
from trusscalc.widgets.trainplace import standing

DIRECTIONS: Final[tuple[Direction, ...]] = ("forward", "backward")
PLACES: Final = 3
UNVALUED: Final = LoadCase("", {})


@dataclass(frozen=True, slots=True)
class Place:
    """Where a train has been put.

    Attributes
    ----------
    train : str
        Its name.
    direction : str
        ``forward`` or ``backward``.
    lead_axle_at : Exact
        Position of the leading axle along the chain.
    spacing : tuple of Exact
        The spacings taken.
    """

    train: str
    direction: Direction
    lead_axle_at: Exact
    spacing: tuple[Exact, ...]


class Travel:
    """A train on its chain over the influence line of one force.

    Parameters
    ----------
    line : InfluenceLine
        The influence line.
    trains : sequence of Train
        The trains to choose from; of a load model, those of which the worst governs.
    screen_of : callable, optional
        Makes what is shown in a cell; without it only the static form is.

    Attributes
    ----------
    line, trains
        As given.
    largest, least : Extreme
        The largest and the least force over all trains and all positions, exactly.
    """

    def __init__(
        self, line: InfluenceLine, trains: Sequence[Train], *, screen_of: Callable[[Travel], Any] | None = None
    ) -> None:
        self.line = line
        self.trains = tuple(trains)
        self.largest, self.least = extremes(line, self.trains)
        self.watchers: list[Callable[[], None]] = []
        self.lock = threading.RLock()
        self._screen_of = screen_of
        self._screen: Any = None
        self._take(self._of(self.largest) or self._of(self.least) or _start(self.trains[0]))

    # --- what is there, and what can be set ---------------------------------------------------------------

    @property
    def place(self) -> Place:
        """Where the train has been put; set, everything is worked out anew."""
        return self._place

    @place.setter
    def place(self, place: Place) -> None:
        self.change(lambda _: place)

    def change(self, move: Callable[[Place], Place]) -> None:
        """Move the train: from the present place to another; moves wait for each other."""
        with self.lock:
            self._take(move(self._place))
            for watcher in self.watchers:
                watcher()

    @property
    def here(self) -> tuple[Extreme, Extreme]:
        """The largest and the least force with the train where it is."""
        return self._here

    @property
    def shown(self) -> Extreme:
        """The one of the two that is drawn: the one that governs where the train is, tension where they are equal."""
        high, low = self._here
        return high if abs(high.value) >= abs(low.value) else low

    @property
    def train(self) -> Train:
        """The train shown; set by its name."""
        return self._named(self.place.train)

    @train.setter
    def train(self, name: str) -> None:
        chosen = self._named(name)
        spacing = tuple(low for low, _ in chosen.spacing)
        self.change(lambda place: replace(place, train=chosen.name, spacing=spacing))

    @property
    def direction(self) -> Direction:
        """``forward``, from the first joint of the chain to its last, or ``backward``."""
        return self.place.direction

    @direction.setter
    def direction(self, direction: str) -> None:
        if direction not in DIRECTIONS:
            message = f"direction {direction!r}: choose forward or backward"
            raise InputError(message)
        way = DIRECTIONS[direction == "backward"]
        self.change(lambda place: replace(place, direction=way))

    @property
    def lead_axle_at(self) -> Exact:
        """Position of the leading axle along the chain from its first joint; numbers as in ``Truss``."""
        return self.place.lead_axle_at

    @lead_axle_at.setter
    def lead_axle_at(self, position: object) -> None:
        at = number(position)
        self.change(lambda place: replace(place, lead_axle_at=at))

    @property
    def spacing(self) -> tuple[Exact, ...]:
        """The axle spacings taken."""
        return self.place.spacing

    @spacing.setter
    def spacing(self, spacing: Sequence[object]) -> None:
        taken = tuple(number(each) for each in spacing)
        self.change(lambda place: replace(place, spacing=taken))

    # --- moves --------------------------------------------------------------------------------------------

    def to_largest(self) -> None:
        """Put the train where the force is largest (InputError when no position makes it positive)."""
        self.place = self._governing(self.largest, "above")

    def to_least(self) -> None:
        """Put the train where the force is least (InputError when no position makes it negative)."""
        self.place = self._governing(self.least, "below")

    def put(self, axle: int, joint: int) -> None:
        """Put an axle over a joint of the chain, both counted from 0 (InputError when there is none)."""
        if not 0 <= axle < len(self.train.axles) or not 0 <= joint < len(self.line.positions):
            message = f"train {self.train.name!r} and the chain have no axle {axle} and joint {joint}"
            raise InputError(message)
        behind = sum(self.spacing[:axle], exact(0))
        at = self.line.positions[joint]
        self.lead_axle_at = at + behind if self.direction == "forward" else at - behind

    # --- on file ------------------------------------------------------------------------------------------

    def frozen(self) -> Bundle:
        """Return what stays on file: the train over the influence line, its force, and the governing positions."""
        return bundle(self.blocks())

    def blocks(self, *, drawings: bool = True) -> list[Block]:
        """Return the train's place and force as blocks, with the positions that govern."""
        blocks: list[Block] = []
        if drawings:
            blocks += [
                Heading(4, capital(target_words(self.line))),
                Picture((influence_figure(self.line, self.shown, self.train),)),
                Paragraph((Run(self.words()),)),
            ]
        blocks.append(self.table())
        agreed = "agree" if self.line.agreed else f"do not agree at {listed(self.line.differing)}"
        return [*blocks, note(f"Ordinates by hand method, by the equilibrium of all joints and by stiffness {agreed}.")]

    def table(self) -> Table:
        """Return the force here and where it is largest and least."""
        rows = [
            self._row("here, largest", self._here[0]),
            self._row("here, least", self._here[1]),
            self._row("largest of all", self.largest),
            self._row("least of all", self.least),
        ]
        columns = (Column(""), Column("train"), Column("leading axle at", "right"), Column("direction"))
        return Table((*columns, Column("exact", "right"), Column("decimal", "right")), tuple(rows))

    def _row(self, what: str, extreme: Extreme) -> tuple[Inline | None, ...]:
        stand = extreme.stand
        at = told(stand.lead_axle_at, UNVALUED) if stand else None
        limit = " (just off the end)" if stand and stand.at_limit else ""
        return (
            Run(what),
            Run(extreme.train if stand else "no position is adverse"),
            at,
            Run(f"{stand.direction}{limit}" if stand else ""),
            told(extreme.value, UNVALUED),
            Decimals(decimal_text(extreme.value, PLACES)),
        )

    def words(self) -> str:
        """Return where the train stands and what that gives, in a sentence."""
        truss = self.line.truss
        high, low = self._here
        at = f"{amount(self.lead_axle_at)} {truss.length}"
        forces = [f"{decimal_text(each.value, PLACES).replace('-', '−')} {truss.force}" for each in (high, low)]
        what = f"{self.train.name}, {self.direction}, leading axle at {at}"
        force = forces[0] if high.value == low.value else f"between {forces[1]} and {forces[0]}"
        return f"{what}: {target_words(self.line)} is {force}."

    def _ipython_display_(self) -> None:
        """Show the train and its controls, and beside them the static form, which follows them."""
        if self._screen is None and self._screen_of is not None:
            self._screen = self._screen_of(self)
        if self._screen is not None:
            self._screen.display()
            return
        from IPython.display import display  # noqa: PLC0415 - only where there are cells

        display(self.frozen(), raw=True)

    # --- worked out ---------------------------------------------------------------------------------------

    def _take(self, place: Place) -> None:
        """Work out what a place gives, then take it."""
        train = self._named(place.train)
        here = standing(self.line, train, place.lead_axle_at, place.direction, place.spacing)
        self._place, self._here = place, here

    def _named(self, name: str) -> Train:
        for train in self.trains:
            if train.name == name:
                return train
        names = [train.name for train in self.trains]
        message = f"there is no train {name!r}{did_you_mean(name, names) or f'; there are {listed(names)}'}"
        raise UnknownNameError(message, name=name)

    def _of(self, extreme: Extreme) -> Place | None:
        """Return where an extreme has its train."""
        stand = extreme.stand
        return None if stand is None else Place(stand.train, stand.direction, stand.lead_axle_at, stand.spacing)

    def _governing(self, extreme: Extreme, side: str) -> Place:
        place = self._of(extreme)
        if place is None:
            message = f"no position of the train brings the force {side} zero"
            raise InputError(message)
        return place


def _start(train: Train) -> Place:
    return Place(train.name, "forward", exact(0), tuple(low for low, _ in train.spacing))
