"""What the browser tests share: cells with a published truss, the pointer on the drawing, the kernel, typeset lines."""

from __future__ import annotations

import re
from typing import Any

from case_files import CASES

KHOO = CASES["khoo_t4"]
"""The K truss of H. A. Khoo, Example T-4: printed are 320 and -320 in the chords, 44.72 and -44.72 in the diagonals."""
KHOO_CELL = f"""import trusscalc
truss = trusscalc.Truss({KHOO.data["joints"]!r}, {KHOO.data["members"]!r}, {KHOO.data["supports"]!r})
loads = trusscalc.LoadCase("published", {KHOO.data["loads"]!r})
trial = truss.explore(loads)
trial"""
TRAIN_CELL = """from trusscalc.trains import Train
go = trial.travel("i-c", Train("pair", (6, 24), (3,)), "a,b,c,d,e,f,g")
go"""

IDLE = """() => {
  const panel = window.jupyterapp?.shell.currentWidget;
  const session = panel?.sessionContext;
  return Boolean(session?.isReady) && session.session?.kernel?.status === 'idle';
}"""
CELL_ERRORS = """() => window.jupyterapp.shell.currentWidget.content.widgets
  .filter((cell) => cell.model.type === 'code')
  .flatMap((cell) => cell.model.sharedModel.toJSON().outputs)
  .filter((output) => output.output_type === 'error')
  .map((output) => `${output.ename}: ${output.evalue}`)"""
LISTEN_TO_KERNEL = """() => {
  window.kernelErrors = [];
  const session = window.jupyterapp.shell.currentWidget.sessionContext;
  session.iopubMessage.connect((_, message) => {
    if (message.header.msg_type === 'error')
      window.kernelErrors.push(`${message.content.ename}: ${message.content.evalue}`);
  });
  // an error of the program in a callback is shown in the drawing, where the next move takes it away again
  const shown = () => {
    for (const { textContent } of document.querySelectorAll('.tc-problem'))
      if (textContent.startsWith('An error in this program')) window.kernelErrors.push(textContent);
  };
  new MutationObserver(shown).observe(document.body, { childList: true, characterData: true, subtree: true });
  return true;
}"""
RUN_ALL = "() => window.jupyterapp.commands.execute('notebook:run-all-cells')"

Spot = tuple[float, float]


class Sheet:
    """A drawing in the page: where its joints are, and the pointer on it."""

    def __init__(self, page: Any, drawing: Any) -> None:
        self.page = page
        self.drawing = drawing
        self.svg = drawing.locator("svg.tc-sheet")

    def settle(self) -> None:
        """Wait until the last move has been answered."""
        self.page.wait_for_function(
            "(node) => !node.classList.contains('tc-waiting')", arg=self.drawing.element_handle()
        )

    def joints(self) -> dict[str, Spot]:
        """Return the middle of every joint on the screen."""
        found = self.svg.evaluate(
            """(svg) => [...svg.querySelectorAll('.tc-joint')].map((joint) => {
                 const box = joint.querySelector('.tc-hit').getBoundingClientRect();
                 return [joint.dataset.joint, box.left + box.width / 2, box.top + box.height / 2];
               })"""
        )
        return {name: (x, y) for name, x, y in found}

    def between(self, first: str, second: str, part: float = 0.5, *, up: float = 0.0) -> Spot:
        """Return a point between two joints, some pixels up from there."""
        places = self.joints()
        (ax, ay), (bx, by) = places[first], places[second]
        return ax + (bx - ax) * part, ay + (by - ay) * part - up

    def drag(self, *spots: Spot) -> None:
        """Press at the first point, move through the others, let go at the last."""
        mouse = self.page.mouse
        mouse.move(*spots[0])
        mouse.down()
        for spot in spots[1:]:
            mouse.move(*spot, steps=8)
        mouse.up()
        self.settle()

    def follow_the_pointer(self) -> None:
        """Have a drag draw a line along the pointer's path."""
        self.drawing.get_by_label("a section along the pointer's path").check()


def in_kernel(page: Any, code: str) -> str:
    """Return what a piece of code prints in the notebook's kernel."""
    return page.evaluate(  # type: ignore[no-any-return]
        """async (code) => {
             const { kernel } = window.jupyterapp.shell.currentWidget.sessionContext.session;
             const future = kernel.requestExecute({ code });
             let told = '';
             future.onIOPub = (message) => {
               if (message.header.msg_type === 'stream') told += message.content.text;
             };
             await future.done;
             return told;
           }""",
        code,
    ).strip()


def typeset(where: Any) -> list[str]:
    """Return the formulas typeset somewhere, as the MathML kept for screen readers, without its attributes."""
    return [
        re.sub(r"\s+", "", re.sub(r"<(\w+) [^>]*>", r"<\1>", markup))
        for markup in where.locator("mjx-assistive-mml math").evaluate_all(
            "(nodes) => nodes.map((node) => node.innerHTML)"
        )
    ]


def spoken(where: Any) -> list[str]:
    """Return the formulas typeset somewhere as plain text; roots and fractions lose their form in it."""
    return [text.strip() for text in where.locator("mjx-assistive-mml math").all_text_contents()]


def ready(page: Any) -> None:
    """Wait until the notebook is open and its kernel idle, and listen for errors of the kernel."""
    page.wait_for_selector(".jp-NotebookPanel .jp-Cell", timeout=60_000)
    page.wait_for_function(IDLE, timeout=60_000)
    page.evaluate(LISTEN_TO_KERNEL)
