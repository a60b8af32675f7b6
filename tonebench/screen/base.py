"""What all actions of the screen stand on: the open bench, the panels, the message line, and refusals in words.

Nothing here or in the actions imports numpy or core when it is loaded: they are on the way to the first picture.
"""

import contextlib
import inspect
from typing import TYPE_CHECKING, TypeVar

from textual.app import App
from textual.widget import Widget

from tonebench.errors import TonebenchError
from tonebench.screen.panels.findings import FindingsPanel
from tonebench.screen.panels.rows import MessageRow, StatusRow
from tonebench.screen.shell import TypedInput

if TYPE_CHECKING:
    from collections.abc import Callable

    from tonebench.screen.bench import Bench

_Outcome = TypeVar("_Outcome")
_Widget = TypeVar("_Widget", bound=Widget)


class BaseApp(App[None]):
    """The application as its actions know it.

    Attributes
    ----------
    bench : Bench or None
        None until it is loaded.
    failure : Exception or None
        Why it could not be loaded.
    marks : str
        What the terminal can show.

    """

    bench: "Bench | None" = None
    failure: Exception | None = None
    marks: str = "braille"
    wants_to_quit: bool = False

    def part(self, kind: type[_Widget]) -> _Widget:
        """Return a panel of the main screen, even while the help lies over it."""
        return self.screen_stack[0].query_one(kind)

    @property
    def typed_input(self) -> TypedInput:
        """The typed line."""
        return self.part(TypedInput)

    @property
    def is_typing(self) -> bool:
        """Whether the typed line is open."""
        return self.typed_input.can_focus

    def say(self, sentence: str) -> None:
        """Put a sentence on the message line."""
        self.part(MessageRow).show(sentence)
        self.fit_message()

    def complain(self, reason: object) -> None:
        """Say that something was not done, and why."""
        self.part(MessageRow).show(str(reason), is_complaint=True)
        self.fit_message()

    def fit_message(self) -> None:
        """Give a long sentence a second row, that of the typed line or, while that is open, of the keys.

        Nothing else moves.
        """
        message, screen = self.part(MessageRow), self.screen_stack[0]
        is_two = message.needed > screen.size.width - 2
        message.set_class(is_two, "-two")
        screen.query_one("#typing").display = self.is_typing or not is_two
        screen.query_one("#keys").display = not (self.is_typing and is_two)

    def open_typed(self, text: str, sentence: str, *, is_selected: bool = False) -> None:
        """Open the typed line, and say what it is for."""
        self.typed_input.open(text, is_selected=is_selected)
        self.say(sentence)
        self.fit_message()

    def close_typed(self) -> None:
        """Close the typed line."""
        self.typed_input.close()
        self.fit_message()

    def ready(self) -> "Bench | None":
        """Return the bench; if it is still being loaded, say so and return None."""
        if self.bench is None:
            self.say("still loading")
        else:
            self.wants_to_quit = False
            self.settle()
        return self.bench

    def attempt(self, act: "Callable[[Bench], str | None]", *, is_edit: bool = False) -> bool:
        """Do something to the bench; say what was done, or why not, and show the outcome."""
        bench = self.ready()
        if bench is None:
            return False
        try:
            sentence = act(bench)
        except TonebenchError as error:
            self.complain(error)
            return False
        if is_edit:
            self.show_edit()
        if sentence is not None:
            self.say(sentence)
        self.show_status()
        return True

    def hand_over(self, act: "Callable[..., object]", *values: object) -> None:
        """Have something done by the screen, called from a thread; if the screen is gone, nothing is.

        Never waits: a thread that waited for a screen that is being left would keep the program from ending.
        """
        with contextlib.suppress(RuntimeError):
            self.call_later(self._unless_gone, act, *values)

    def in_thread(
        self,
        work: "Callable[[], _Outcome]",
        done: "Callable[[_Outcome], object]",
        failed: "Callable[[], object]" = lambda: None,
    ) -> None:
        """Do work in a thread, and hand its outcome to the screen; a failure is told, and the work on the bench stays.

        An error that nobody foresaw must not take unsaved work with it, so it is told like the others.
        """

        def run() -> None:
            try:
                outcome = work()
            except TonebenchError as error:
                self.hand_over(self.complain, error)
                self.hand_over(failed)
            except Exception as error:  # noqa: BLE001 - see above
                self.hand_over(self.complain, f"internal error ({type(error).__name__}: {error}); nothing is lost")
                self.hand_over(failed)
            else:
                self.hand_over(done, outcome)

        self.run_worker(run, thread=True)

    async def _unless_gone(self, act: "Callable[..., object]", *values: object) -> None:
        if not self.is_gone:
            outcome = act(*values)
            if inspect.isawaitable(outcome):
                await outcome

    @property
    def is_gone(self) -> bool:
        """Whether the screen is being left: timers and threads that come late find no panels any more."""
        return not self.screen_stack

    # What the other parts of the application do; the actions call them by these names.
    def settle(self) -> None:
        """Apply arrow presses that still wait."""

    def show_edit(self) -> None:
        """Give the engine the chain as it is now, and draw it."""

    def show_status(self) -> None:
        """Draw the status row."""

    @property
    def status_row(self) -> StatusRow:
        """The row on top."""
        return self.part(StatusRow)

    @property
    def findings_panel(self) -> FindingsPanel:
        """The findings."""
        return self.part(FindingsPanel)
