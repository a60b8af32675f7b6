"""The application: wiring only. What the keys do stands in the actions, what is where in the shell.

Importing this loads Textual and nothing heavy, so that panels and frames are painted before numpy is read.
"""

import asyncio
import contextlib
import signal
from typing import TYPE_CHECKING, ClassVar

from textual.app import ComposeResult
from textual.binding import BindingType

from tonebench.screen import shell
from tonebench.screen.actions_peak import PeakActions
from tonebench.screen.keys import OPENING, bindings
from tonebench.screen.terminal import choose_marks

if TYPE_CHECKING:
    from tonebench.screen.bench import Bench
    from tonebench.screen.loading import Loader


class BenchApp(PeakActions):
    """The bench on the screen.

    Parameters
    ----------
    loader : Loader
        Loads what is worked on, in a thread.

    """

    TITLE = "tonebench"
    CSS = shell.CSS
    ENABLE_COMMAND_PALETTE = False
    BINDINGS: ClassVar[list[BindingType]] = [*bindings()]

    def __init__(self, loader: "Loader") -> None:
        super().__init__()
        self._loader = loader

    def check_action(self, action: str, parameters: tuple[object, ...]) -> bool | None:
        """Leave keys that open the typed line to the line itself, and to help and findings, while open."""
        if action in OPENING and (len(self.screen_stack) > 1 or self.is_typing):
            return False
        return super().check_action(action, parameters)

    def compose(self) -> ComposeResult:
        """Lay out the shell."""
        yield from shell.compose_shell()

    def on_mount(self) -> None:
        """Paint the shell, then load."""
        self._leave_when_told()
        self.set_marks(choose_marks())
        self.arrange(self.size)
        self.call_after_refresh(self._start_loading)

    def _leave_when_told(self) -> None:
        """Leave in order when the terminal's window is closed, or the system ends the program.

        Without this Python would end on the spot, and the engine's shared memory would stay behind.
        """
        loop = asyncio.get_running_loop()
        for name in ("SIGHUP", "SIGTERM"):
            # Windows knows neither, and signals reach the main thread only.
            with contextlib.suppress(NotImplementedError, RuntimeError, ValueError, AttributeError):
                loop.add_signal_handler(getattr(signal, name), self.exit)

    def _start_loading(self) -> None:
        self.run_worker(self._load, thread=True, group="loading")

    def _load(self) -> None:
        """Load in a thread; whatever goes wrong ends the screen and is told on the command line."""
        try:
            bench = self._loader.load()
            words = [*bench.notes, bench.rate_words(), bench.hearing_words()]
        except Exception as error:  # noqa: BLE001 - the command line tells it in one line, whatever it is
            self.hand_over(self._fail, error)
            return
        sentence = ". ".join(one.rstrip(".") for one in words if one)
        self.hand_over(self._have_bench, bench, f"{sentence}.")

    async def _have_bench(self, bench: "Bench", sentence: str) -> None:
        self.bench = bench
        await self.put_charts()
        self.show_selection()
        self.ask_findings()
        self.find_long_term()
        self.say(sentence)
        self.start_polling()

    def _fail(self, error: Exception) -> None:
        self.failure = error
        self.exit()
