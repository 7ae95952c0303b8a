"""An exploration: the same moves by code, form and page; nothing half done; a form on file without a kernel."""

from __future__ import annotations

import asyncio
import json
import threading
from collections.abc import Iterator
from typing import Any

import pytest
from case_files import CASES
from trade_trusses import pratt

import trusscalc
from trusscalc.errors import InputError, NoCutError, RenderError, UnknownNameError, UnstableTrussError
from trusscalc.exacttext import parse, to_text
from trusscalc.loads import Combination, LoadCase
from trusscalc.trussfile import TrussFile
from trusscalc.widgets import Exploration, explore
from trusscalc.widgets.choices import names_of, typed_centre, typed_direction, typed_line

KHOO = CASES["khoo_t4"]
"""The K truss of H. A. Khoo, Example T-4: printed are 320 and -320 in the chords, 44.72 and -44.72 in the diagonals."""
ROUND_J = [(10, -1), (7, 2), (10, 5)]
ACROSS = [(10, -1), (10, 5)]


@pytest.fixture
def trial() -> Exploration:
    """Return the K truss under its printed loads."""
    return explore(KHOO.truss, KHOO.loads)


@pytest.fixture
def screen(trial: Exploration) -> Iterator[Any]:
    """Drawing and form of it, as a cell shows them, without a page."""
    pytest.importorskip("anywidget")
    from trusscalc.widgets.screen import Screen  # noqa: PLC0415 - not on every machine

    made = Screen(trial)
    yield made
    made.box.close()


# --- by code ----------------------------------------------------------------------------------------------


def test_the_way_of_an_engineer_through_a_k_panel(trial: Exploration) -> None:
    """Straight: nothing. Round the joint: the chords. Kept, they open the straight section for the diagonals."""
    trial.draw(ACROSS)
    assert trial.answer is not None
    assert trial.answer.solved == {}
    trial.draw(ROUND_J)
    assert set(trial.answer.solved) == {"c-d", "p-q"}
    trial.keep()
    assert trial.members == tuple(trial.answer.solved)
    trial.draw(ACROSS)
    assert {name: to_text(value) for name, value in trial.answer.solved.items()} == {
        "j-d": "-20*sqrt(5)",
        "j-q": "20*sqrt(5)",
    }
    trial.keep("j-q")
    assert trial.check is not None
    assert trial.check.agreed
    assert {name: to_text(item.exact) for name, item in trial.check.members.items() if item.exact is not None} == {
        "c-d": "-320",
        "p-q": "320",
        "j-q": "20*sqrt(5)",
    }
    assert set(trial.cuts) == {"c-d", "p-q", "j-q"}


def test_state_is_read_and_set_from_code(trial: Exploration) -> None:
    """Cut, members, centre, direction: what was set is what is there."""
    trial.cut = KHOO.truss.cut(through=["c-d", "p-q", "c-j", "j-p"])
    assert trial.cut is not None
    assert set(trial.cut.kept) == {"n", "h", "a", "o", "i", "b", "c", "p"}
    trial.centre = "p"
    assert trial.centre == "p"
    assert list(trial.answer.solved) == ["c-d"]  # type: ignore[union-attr]
    trial.centre = (8, "0")
    assert trial.centre == (parse("8"), parse("0"))
    trial.direction = (1, 0)
    assert trial.centre is None
    assert trial.direction == (parse("1"), parse("0"))
    trial.direction = None
    assert trial.about is None
    trial.other_side()
    assert set(trial.cut.kept) | {"d"} > {"d", "q"}
    trial.members = ["d-c"]
    assert trial.members == ("c-d",)
    trial.members = []
    assert trial.check is None
    trial.cut = None
    assert trial.answer is None
    trial.section = ROUND_J
    assert trial.section[1] == (parse("7"), parse("2"))
    trial.detail = "all"
    assert trial.detail == "all"


def test_a_kept_cut_is_the_one_that_check_members_takes(trial: Exploration) -> None:
    """The check equals one made in a script with the same cuts."""
    trial.draw(ROUND_J)
    trial.keep("c-d")
    by_script = trusscalc.check_members(KHOO.truss, KHOO.loads, [], cuts=trial.cuts)
    assert trial.check == by_script
    trial.forget("c-d")
    assert trial.cuts == {}
    assert trial.check is None


def test_every_error_leaves_everything_as_it_was(trial: Exploration) -> None:
    """Unknown names, cuts that do not give a member, moves without a cut: told, and nothing has changed."""
    trial.draw(ROUND_J)
    before = trial.choices
    answer = trial.answer
    moves = [
        (lambda: setattr(trial, "cut", ["nowhere"]), UnknownNameError, "nowhere"),
        (lambda: setattr(trial, "members", ["a-z"]), UnknownNameError, "a-z"),
        (lambda: setattr(trial, "case", "snow"), UnknownNameError, "no case or combination 'snow'"),
        (lambda: setattr(trial, "centre", (1, 2, 3)), InputError, "two numbers"),
        (lambda: setattr(trial, "direction", (0, 0)), InputError, "cannot be summed"),
        (lambda: setattr(trial, "detail", "much"), InputError, "choose members"),
        (lambda: trial.keep("a-b"), NoCutError, "does not cut a-b"),
        (trial.take_nearest, InputError, "no nearer cut"),
        (lambda: trial.draw([(1, 1)]), InputError, "2 to 40"),
    ]
    for move, error, message in moves:
        with pytest.raises(error, match=message):
            move()
        assert trial.choices == before
        assert trial.answer is answer


def test_a_line_that_is_no_cut_leaves_no_old_answer(trial: Exploration) -> None:
    """Nothing of the cut before stays: no answer, and the reason in its place."""
    trial.draw(ROUND_J)
    trial.draw([(10, -1), (10, 2)])
    assert trial.answer is None
    assert "does not part the truss" in trial.choices.fault
    with pytest.raises(InputError, match="no cut to keep"):
        trial.keep()
    assert "does not part" in trial.frozen()["text/plain"]


def test_another_case_changes_every_number() -> None:
    """Check and answer are of the case shown, also of a combination; pairs and moving loads are not offered."""
    stated = pratt(6)
    wind = LoadCase("wind", {"U2": (10, 0)})
    dead = LoadCase("dead", stated.case.loads)
    both = (Combination("both", {"dead": "1.35", "wind": "1.5"}), Combination("pair", {"dead": ["1.35", "1"]}))
    file = TrussFile(stated.truss, (dead, wind), both)
    assert names_of(file) == ("dead", "wind", "both")
    trial = explore(file, "dead")
    trial.cut = file.truss.cut(through=["L2-L3", "U2-U3", "U2-L3"])
    trial.keep("U2-U3")
    under_dead = trial.check.members["U2-U3"].exact  # type: ignore[union-attr]
    trial.case = "wind"
    under_wind = trial.check.members["U2-U3"].exact  # type: ignore[union-attr]
    trial.case = "both"
    assert under_dead is not None
    assert under_wind is not None
    assert trial.answer.solved["U2-U3"] == parse("1.35") * under_dead + parse("1.5") * under_wind  # type: ignore[union-attr]
    assert trial.check.members["U2-U3"].exact == trial.answer.solved["U2-U3"]  # type: ignore[union-attr]


def test_explore_says_what_it_needs() -> None:
    """Loads for a truss, a name for a file, a stable truss."""
    truss = pratt(6).truss
    with pytest.raises(InputError, match="give the loads"):
        explore(truss)
    with pytest.raises(InputError, match="no loads to explore"):
        explore(TrussFile(truss))
    with pytest.raises(InputError, match="give the name of a case"):
        explore(TrussFile(truss, (LoadCase("dead", {}),)), LoadCase("dead", {}))
    loose = trusscalc.Truss(
        {"A": (0, 0), "B": (4, 0), "C": (4, 3), "D": (0, 3)},
        ["A-B", "B-C", "C-D", "A-D"],
        {"A": "pin", "B": "roller"},
    )
    with pytest.raises(UnstableTrussError):
        explore(loose, LoadCase("push", {"C": (1, 0)}))
    assert truss.explore(LoadCase("dead", {"L1": (0, -1)})).case == "dead"


@pytest.mark.parametrize(
    ("read", "text", "message"),
    [
        (lambda text: typed_centre(KHOO.truss, text), "zz", "no joint 'zz'"),
        (lambda text: typed_centre(KHOO.truss, text), "1, 2, 3", "two numbers with a comma"),
        (lambda text: typed_centre(KHOO.truss, text), "1, __import__", "1, __import__|is not known here|__import__"),
        (typed_direction, "0, 0", "no direction"),
        (typed_direction, "up", "two numbers with a comma"),
        (typed_line, "1, 2; 3", "two numbers with a comma"),
    ],
)
def test_what_is_typed_wrong_is_told(read: Any, text: str, message: str) -> None:
    """What was typed, and what is needed; nothing of it is evaluated."""
    with pytest.raises(trusscalc.TrusscalcError, match=message):
        read(text)


# --- on file ----------------------------------------------------------------------------------------------


def test_the_form_on_file_reads_without_a_kernel(trial: Exploration) -> None:
    """Figure, typeset equation, exact value and verdict, in types that survive an untrusted notebook."""
    trial.draw(ROUND_J)
    trial.keep("c-d")
    form = trial.frozen()
    assert set(form) == {"text/markdown", "text/plain"}
    assert "data:image/svg+xml;base64," in form["text/markdown"]
    assert r"N_{\text{c–d}}" in form["text/markdown"]
    assert "−320.000 kN C (agrees)" in form["text/markdown"].replace("&#40;", "(").replace("&#41;", ")")
    assert "stiffness" in form["text/plain"]
    assert "agrees" in form["text/plain"]
    assert form == trial.frozen()


# --- drawing and form -------------------------------------------------------------------------------------


def test_page_form_and_code_make_the_same_moves(screen: Any, trial: Exploration) -> None:
    """A section drawn, joints chosen in the list, points typed: one cut, shown by all."""
    screen.received({"event": "section", "points": [[10, -1], [7, 2], [10, 5]], "closed": False})
    drawn = trial.cut
    assert set(screen.form.kept.value) == set(drawn.kept)  # type: ignore[union-attr]
    assert set(screen.form.through.value) == {"c-d", "p-q", "c-j", "j-p"}
    assert screen.drawing.state["cut"] == list(screen.form.through.value)
    screen.form.clear.click()
    assert trial.cut is None
    assert screen.form.kept.value == ()
    screen.form.kept.value = tuple(drawn.kept)  # type: ignore[union-attr]
    assert trial.cut == drawn
    screen.form.clear.click()
    screen.form.line.value = "10, -1; 7, 2; 10, 5"
    assert trial.cut == drawn
    screen.form.through.value = ("c-d", "p-q", "j-d", "j-q")
    assert "j" in trial.cut.kept  # type: ignore[union-attr]
    screen.received({"event": "keep", "joint": "j"})
    assert trial.cut == drawn
    screen.form.keep.click()
    assert set(screen.form.members.value) == {"c-d", "p-q"}
    screen.received({"event": "member", "member": "a-b"})
    assert "a-b" in screen.form.members.value
    screen.form.forget.click()
    assert trial.members == ()


def test_the_equation_is_chosen_by_pointer_list_or_typing(screen: Any, trial: Exploration) -> None:
    """A joint clicked, an entry of the list, a centre or a direction typed."""
    trial.draw(ROUND_J)
    screen.received({"event": "centre", "joint": "p"})
    assert trial.centre == "p"
    assert screen.form.centre.value == "p"
    assert screen.drawing.state["about"]["joint"] == "p"
    screen.received({"event": "centre", "joint": "p"})
    assert trial.about is None
    screen.form.equation.value = 2
    assert trial.about == trial.answer.possibilities[1].about  # type: ignore[union-attr]
    screen.form.direction.value = "y"
    assert trial.direction == (parse("0"), parse("1"))
    assert screen.form.equation.label
    screen.form.centre.value = "8, 1/2"
    assert trial.centre == (parse("8"), parse("1/2"))
    assert screen.form.centre.value == "8, 0.5"
    screen.form.equation.value = 0
    assert trial.about is None


def test_what_goes_wrong_is_told_in_the_drawing(screen: Any, trial: Exploration, monkeypatch: Any) -> None:
    """An engineer's slip and a defect of the program: both are shown, neither changes anything."""
    trial.draw(ROUND_J)
    before = trial.choices
    screen.form.centre.value = "nowhere"
    assert "no joint 'nowhere'" in screen.drawing.state["problem"]
    assert trial.choices == before
    for content in (
        {"event": "fly"},
        "nonsense",
        {"event": "section", "points": [[1]], "closed": False},
        {"event": "keep"},
    ):
        screen.received(content)
        assert screen.drawing.state["problem"]
        assert trial.choices == before
    screen.received({"event": "section", "points": [[float("nan"), 0], [1, 1]], "closed": False})
    assert screen.drawing.state["problem"]

    def broken(*_: Any, **__: Any) -> None:
        message = "a planted defect"
        raise RuntimeError(message)

    monkeypatch.setattr("trusscalc.widgets.exploration.answer", broken)
    screen.form.side.click()
    assert "An error in this program (RuntimeError: a planted defect)" in screen.drawing.state["problem"]
    assert trial.choices == before
    monkeypatch.undo()
    screen.form.side.click()
    assert screen.drawing.state["problem"] == ""
    assert trial.choices != before


def test_the_page_is_sent_plain_data(screen: Any, trial: Exploration) -> None:
    """Everything the page gets is JSON; every move is numbered, so that the page draws anew."""
    trial.draw(ROUND_J)
    first = screen.drawing.state["turn"]
    state = json.loads(json.dumps(screen.drawing.state))
    assert state["turn"] == first
    assert state["line"]["keptLeft"] is True
    assert state["pulls"].keys() == {"c-d", "p-q", "c-j", "j-p"}
    assert state["values"]["c-d"] == ["−320.0 C", "C"]
    assert [reaction[3] for reaction in state["reactions"]] == ["240"]
    json.dumps(screen.drawing.truss)
    screen.form.side.click()
    assert screen.drawing.state["turn"] > first
    assert screen.drawing.state["line"]["keptLeft"] is False


def test_moves_of_several_threads_follow_one_another(screen: Any, trial: Exploration) -> None:
    """A notebook may run callbacks beside its cells: of twelve joints kept at once none is lost."""
    joints = [joint.name for joint in KHOO.truss.joints][:12]
    threads = [threading.Thread(target=screen.received, args=({"event": "keep", "joint": joint},)) for joint in joints]
    for thread in threads:
        thread.start()
    trial.members = ["b-c"]
    for thread in threads:
        thread.join()
    assert set(trial.choices.kept) == set(joints)
    assert trial.members == ("b-c",)
    assert set(screen.drawing.state["kept"]) == set(joints)


def test_of_lines_that_overtake_each_other_the_last_counts(screen: Any, trial: Exploration) -> None:
    """Numbered by the view that sends them; other moves are never left out, nor are those of another view."""
    later = {"event": "section", "points": [[10, -1], [7, 2], [10, 5]], "closed": False, "view": "v", "number": 2}
    screen.received(later)
    drawn = trial.cut
    screen.received({**later, "points": [[10, -1], [10, 5]], "number": 1})
    assert trial.cut == drawn
    screen.received({"event": "member", "member": "a-b", "view": "v", "number": 1})
    assert trial.members == ("a-b",)
    screen.received({**later, "points": [[10, -1], [10, 5]], "view": "w", "number": 1})
    assert trial.cut != drawn


def test_the_form_on_file_waits_until_the_hand_rests(
    screen: Any, trial: Exploration, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Three quick moves in the page renew it once; a move in a cell renews it before the cell ends."""
    renewed: list[str] = []
    monkeypatch.setattr("trusscalc.widgets.onscreen.REST", 0.05)
    monkeypatch.setattr(
        "trusscalc.widgets.onscreen.update_display", lambda form, **_: renewed.append(form["text/plain"])
    )
    screen.displays = 1

    async def three_moves() -> None:
        for joint in ("n", "h", "a"):
            screen.received({"event": "keep", "joint": joint})
        assert renewed == []
        await asyncio.sleep(0.5)

    asyncio.run(three_moves())
    assert len(renewed) == 1
    assert "a–b" in renewed[0]
    trial.cut = None
    assert len(renewed) == 2
    assert "No cut has been chosen" in renewed[1]


def test_a_page_loaded_again_says_that_the_form_on_file_is_old(screen: Any) -> None:
    """A view that no cell has shown: what stands below it may be of an earlier state."""
    screen.displays = 1
    screen.received({"event": "shown"})
    assert "loaded again" not in screen.drawing.state["status"]
    screen.received({"event": "shown"})
    assert "loaded again" in screen.drawing.state["status"]


def test_without_the_package_for_drawings_the_error_says_what_to_install(
    trial: Exploration, monkeypatch: pytest.MonkeyPatch
) -> None:
    """The state is there all the same."""
    monkeypatch.setitem(__import__("sys").modules, "anywidget", None)
    for name in ("screen", "views", "trainscreen"):
        monkeypatch.delitem(__import__("sys").modules, f"trusscalc.widgets.{name}", raising=False)
    with pytest.raises(RenderError, match=r"anywidget, which is not installed: python -m pip install"):
        trial._ipython_display_()
    trial.draw(ROUND_J)
    assert trial.answer is not None
