"""The findings: severity in words, worst first, as many as there is room for; and how many more there are."""

from collections.abc import Sequence
from dataclasses import dataclass

from textual.content import Content

from tonebench.screen.panels.panel import ELLIPSIS, Panel, cut, wrap


@dataclass(frozen=True, slots=True)
class FindingWords:
    """One finding in words."""

    severity: str
    section: int | None
    message: str
    remedy: str = ""
    because: str = ""

    @property
    def head(self) -> str:
        """Severity and section; an accepted finding says so."""
        word = f"accepted {self.severity}" if self.because else self.severity
        return f"{word}, section {self.section}:" if self.section is not None else f"{word}:"

    @property
    def lines(self) -> tuple[str, ...]:
        """All that there is to say, for the list of all findings."""
        found = [f"{self.head} {self.message}"]
        if self.remedy:
            found.append(f"what to do: {self.remedy}")
        if self.because:
            found.append(f"accepted because {self.because}")
        return tuple(found)


class FindingsPanel(Panel):
    """The worst findings."""

    BORDER_TITLE = "findings"

    def __init__(self, *, id: str | None = None) -> None:  # noqa: A002 - Textual's name for it
        super().__init__(id=id)
        self._findings: tuple[FindingWords, ...] | None = None
        self._target = ""
        self._is_pending = False

    @property
    def findings(self) -> tuple[FindingWords, ...]:
        """What is shown, worst first."""
        return self._findings or ()

    def show(self, findings: Sequence[FindingWords], target: str) -> None:
        """Show other findings; they belong to the chain as it is now."""
        self._findings, self._target, self._is_pending = tuple(findings), target, False
        self._title()
        self.paint()

    def set_pending(self) -> None:
        """Mark the findings as those of an earlier state, until newer ones are shown."""
        self._is_pending = True
        self._title()
        self.paint()

    def _title(self) -> None:
        target = f" · {self._target}" if self._target else ""
        self.set_title(f"findings{target}{' ' + ELLIPSIS if self._is_pending else ''}")

    def draw(self, width: int, height: int) -> Content:
        """Draw as many whole findings as fit; the last row names how many are left."""
        if self._findings is None:
            return Content(self.spell(f"looking {ELLIPSIS}"))
        if not self._findings:
            return Content("no findings")
        blocks = [self._block(one, width) for one in self._findings]
        shown: list[str] = []
        count = 0
        for block in blocks:
            spare = 1 if count + 1 < len(blocks) else 0
            if shown and len(shown) + len(block) + spare > height:
                break
            shown += block
            count += 1
        left = len(blocks) - count
        room = height - (1 if left and height > 1 else 0)
        if len(shown) > room:
            shown = [*shown[: room - 1], cut(shown[room - 1] + " " * width, width)]
        if left and height > 1:
            shown.append(cut(f"and {left} more: press f", width))
        return Content("\n").join(self._styled(self.spell(line)) for line in shown)

    @staticmethod
    def _block(finding: FindingWords, width: int) -> list[str]:
        return wrap(f"{finding.head} {finding.message}", width, indent="  ")

    @staticmethod
    def _styled(line: str) -> Content:
        head, colon, rest = line.partition(":")
        if colon and head.split(",")[0].removeprefix("accepted ") in ("note", "caution", "danger"):
            return Content.assemble((head + colon, "bold"), rest)
        return Content(line)
