"""What single results look like in a notebook: forces, numbers, equations and cuts of one's own."""

from __future__ import annotations

import trusscalc
from trusscalc import shapes
from trusscalc.exacttext import parse
from trusscalc.sheet.figures import cut_figure, overlaps, truss_figure

BRIDGE = shapes.pratt(6, 4, 5)
DECK = shapes.panel_loads(BRIDGE, "L", (0, -100), name="deck")
CUT = BRIDGE.cut(keep=["L0", "L1", "U1"])


def test_a_force_tells_everything_about_itself() -> None:
    """Exact, rounded from the exact value, sense, the other route, verdict, steps; T and C for members only."""
    check = trusscalc.check_members(BRIDGE, DECK, ["U2-L3"])
    shown = check.members["U2-L3"]._repr_mimebundle_()
    assert r"*Exact*: $\displaystyle 10\sqrt{41}$" in shown["text/markdown"]
    for words in ("64.031", "T/C              T", "agrees", "2 and 4"):
        assert words in shown["text/plain"]
    assert "T/C" not in check.reactions["L0.y"]._repr_mimebundle_()["text/plain"]


def test_a_force_that_statics_does_not_decide_says_so() -> None:
    """No exact value, no decimal, and the reason."""
    frame = trusscalc.Truss(
        {"A": (0, 0), "B": (4, 0), "C": (4, 3), "D": (0, 3)},
        ["A-B", "B-C", "C-D", "D-A", "A-C", "B-D"],
        {"A": "pin", "B": "roller"},
    )
    check = trusscalc.check_members(frame, trusscalc.LoadCase("x", {"C": (5, 0)}), ["A-C"])
    shown = check.members["A-C"]._repr_mimebundle_()["text/plain"]
    assert "undecided: statics alone does not decide it" in shown
    assert "Exact" not in shown


def test_a_number_is_typeset_and_can_be_read_in_again() -> None:
    """LaTeX for the eye, the text of truss files for the rest."""
    number = parse("-36/5 - 603*sqrt(3)/40")
    shown = number._repr_mimebundle_()
    assert shown["text/latex"] == r"$\displaystyle -\frac{36}{5} - \frac{603\sqrt{3}}{40}$"
    assert parse(shown["text/plain"]) == number


def test_an_equation_is_a_line_in_symbols() -> None:
    """Arms before forces, what drops out by name; the sum is of the right loads and bars."""
    shown = CUT.equation(DECK, centre="L2")._repr_mimebundle_()
    assert "−8 R_L0,y + 4 P_L1,y − 5 N_U1–U2 = 0" in shown["text/plain"]
    assert "Part kept, moments about L2, anticlockwise positive" in shown["text/plain"]
    assert "L1–L2" in shown["text/plain"].split("Drop out")[1]
    assert r"N_{\text{U1–U2}}" in shown["text/markdown"]


def test_names_that_do_not_fit_a_subscript_are_numbered_and_told() -> None:
    """Each number's name stands below the line."""
    truss = trusscalc.Truss(
        {"heel of the northern rafter": (0, 0), "B": (4, 0), "$x$": (2, 1)},
        ["heel of the northern rafter-B", "heel of the northern rafter-$x$", "B-$x$"],
        {"heel of the northern rafter": "pin", "B": "roller"},
    )
    load = trusscalc.LoadCase("x", {"$x$": (1, -2)})
    shown = truss.cut(keep=["$x$"]).equation(load, direction=(0, 1))._repr_mimebundle_()
    assert "N_(1)" in shown["text/plain"]
    assert "(1)          heel of the northern rafter–$x$" in shown["text/plain"]
    assert "$x$" not in shown["text/markdown"]


def test_a_cut_is_drawn_in_its_truss() -> None:
    """The picture stands before the facts, and its words name what is kept and cut."""
    shown = CUT._repr_mimebundle_()
    assert "data:image/svg+xml;base64," in shown["text/markdown"]
    assert "joints kept: L0, L1 and U1; cut: L1–L2, U1–U2, U1–L2, L0,x and L0,y" in shown["text/plain"].replace(
        "\n", " "
    )
    figure = cut_figure(BRIDGE, CUT.kept)
    assert "Section line" in figure.caption
    assert "Section line" not in cut_figure(BRIDGE, ["L2"]).caption


def test_the_drawn_cut_has_no_label_over_another() -> None:
    """Cuts of an eight-panel K truss, straight and bent, and a joint."""
    truss = shapes.k_truss(8, 4, 6)
    left = ["L0", "L1", "U1", "M1", "L2", "U2"]
    for kept in (left, [*left, "M2"], ["M2"]):
        assert not overlaps(cut_figure(truss, kept))


def test_why_a_cut_gives_nothing_is_told_in_the_words_of_the_sheet() -> None:
    """Members are written with a dash everywhere."""
    shown = BRIDGE.cut(keep=["L2", "U2"]).report(DECK)._repr_mimebundle_()["text/plain"]
    assert "(L1–L2, U1–L2, U1–U2" in shown
    assert "L1-L2" not in shown


def test_a_figure_shows_itself() -> None:
    """With words for those who cannot see it."""
    shown = truss_figure(BRIDGE, DECK)._repr_mimebundle_()
    assert set(shown) == {"text/html", "image/svg+xml", "image/png", "text/plain"}
    assert "loads in kN" in shown["text/plain"]
