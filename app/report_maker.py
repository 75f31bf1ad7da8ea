"""The report made in a thread of its own: its bytes, its pages, what it was made from.

What was computed is kept: another paper or orientation is only laid out anew.
"""

from __future__ import annotations

import logging
import time
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from msgspec import structs
from PySide6.QtCore import QObject, Qt, Signal

from app.field_store import load_kernels
from app.worker import Outdated, Worker
from engine.errors import Cancelled, ComputationCancelled, Progress, UserError, stop_if
from engine.exchange.pdf_pages import PdfPages, pdf_pages
from engine.items import TitleData
from engine.layout import Layout
from engine.variants import layout_of

if TYPE_CHECKING:
    from engine.field import ResponseCache
    from engine.report.choices import Choices
    from engine.report.matter import Matter
    from engine.results import Assessment

#: Part of the work done when everything is computed.
_COMPUTED = 0.85

#: Memory for responses, so that the next report takes less. [bytes]
_CACHE = 256 * 2**20

#: Seconds between two notices of progress.
_NOTICE = 0.1


@dataclass(frozen=True, eq=False)
class Wanted:
    """A report that is asked for: of which layout, with its variants, and how."""

    layout: Layout
    choices: Choices

    def is_same(self, other: Wanted | None) -> bool:
        """Whether both ask for the same bytes."""
        if other is None or self.choices != other.choices:
            return False
        return self.layout is other.layout or self.layout == other.layout


@dataclass(frozen=True, eq=False)
class MadeReport:
    """A report as it was made: what `Write PDF` writes is `content`."""

    wanted: Wanted
    content: bytes
    pages: PdfPages
    matter: Matter


class Maker:
    """Makes reports one after the other; used by one thread at a time."""

    def __init__(self) -> None:
        self._computed: tuple[Wanted, Matter] | None = None
        self._cache: ResponseCache | None = None

    def made(
        self,
        wanted: Wanted,
        cancelled: Cancelled | None = None,
        progress: Progress | None = None,
    ) -> MadeReport:
        """The report.

        Raises
        ------
        UserError
            When there can be none; the sentence says why.
        ComputationCancelled
            When `cancelled` says so.
        """
        # Here: what draws on paper takes long to load.
        from engine.report.document import report_pdf
        from engine.report.page import Watch

        matter = self._matter(wanted, cancelled, _part(progress, 0.0, _COMPUTED))
        stop_if(cancelled)
        watch = Watch(cancelled, _part(progress, _COMPUTED, 1.0))
        content = report_pdf(matter, wanted.choices, watch=watch)
        return MadeReport(wanted, content, pdf_pages(content), matter)

    def _matter(
        self, wanted: Wanted, cancelled: Cancelled | None, progress: Progress | None
    ) -> Matter:
        """What is printed; computed only as far as it is not there yet."""
        from engine.field import ResponseCache
        from engine.report.writing import computed_matter

        # Neither of them counts for what is computed.
        plain = replace(wanted.choices, paper=None, orientation=None)
        computing = Wanted(wanted.layout, plain)
        self._cache = self._cache or ResponseCache(_CACHE)
        held = self._computed
        assessment = None
        if held is not None and _has_same_results(held[0], computing):
            if held[0].choices == plain:
                matter = _retitled(
                    held[1], wanted.layout, self._cache, cancelled, progress
                )
                self._computed = (computing, matter)
                return matter
            assessment = _reassessed(held[1], wanted.layout)
        matter = computed_matter(
            wanted.layout,
            wanted.choices,
            assessment=assessment,
            cache=self._cache,
            cancelled=cancelled,
            progress=progress,
        )
        self._computed = (computing, matter)
        return matter


def _has_same_results(one: Wanted, other: Wanted) -> bool:
    """Whether two layouts differ in what is printed only: title block, revisions."""
    if one.choices.variant != other.choices.variant:
        return False
    if one.layout is other.layout:
        return True
    return _computed_part(one.layout) == _computed_part(other.layout)


def _computed_part(layout: Layout) -> Layout:
    settings = structs.replace(layout.settings, paper="A4")
    return structs.replace(
        layout, title=TitleData(id="title"), revisions=(), settings=settings
    )


def _reassessed(matter: Matter, layout: Layout) -> Assessment:
    """The same results as those of a layout that only prints otherwise."""
    variant = matter.variant
    chosen = layout if variant is None else layout_of(layout, variant.id)
    return replace(matter.assessment, layout=chosen)


def _retitled(
    matter: Matter,
    layout: Layout,
    cache: ResponseCache,
    cancelled: Cancelled | None,
    progress: Progress | None,
) -> Matter:
    """The same matter of a layout with another title block or other revisions."""
    from engine.remarks import confirmed_remarks, remarks
    from engine.report.maps import MOST_MAPS, computed_maps, wanted_maps

    if matter.source is layout:
        return matter
    assessment = _reassessed(matter, layout)
    # The project stands on every map.
    maps = computed_maps(
        assessment,
        wanted_maps(assessment)[:MOST_MAPS],
        unit=matter.unit,
        cache=cache,
        cancelled=cancelled,
        progress=progress,
    )
    return replace(
        matter,
        assessment=assessment,
        remarks=remarks(assessment.layout, assessment, unit=matter.unit),
        confirmed=confirmed_remarks(assessment.layout, assessment, unit=matter.unit),
        maps=maps,
        whole=layout,
    )


class ReportMaker(QObject):
    """Makes the newest report that is asked for, in the background.

    Signals
    -------
    began()
    progressed(share, doing)
    made(MadeReport)
    refused(sentence)
        There is no such report.
    ended()
        Whatever came of it, once nothing else waits.
    """

    began = Signal()
    progressed = Signal(float, str)
    made = Signal(object)
    refused = Signal(str)
    ended = Signal()
    _told = Signal(object, float, str)
    _done = Signal(object, object)

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._maker = Maker()
        self._asked: Wanted | None = None
        self._told.connect(self._on_told, Qt.ConnectionType.QueuedConnection)
        self._done.connect(self._on_done, Qt.ConnectionType.QueuedConnection)
        self._worker: Worker[Wanted | None] = Worker("report", self._work, load_kernels)

    @property
    def is_making(self) -> bool:
        """A report is asked for and not there yet."""
        return self._asked is not None

    def make(self, wanted: Wanted) -> None:
        """Make this one, and no other."""
        if wanted.is_same(self._asked):
            return
        self._asked = wanted
        self.began.emit()
        self._worker.ask(wanted)

    def cancel(self) -> None:
        """Make none."""
        if self._asked is not None:
            self._asked = None
            self._worker.ask(None)
            self.ended.emit()

    def close(self) -> None:
        """Stop the thread, before the window goes."""
        self._worker.close()

    # -- in the thread ------------------------------------------------------------

    def _work(self, wanted: Wanted | None, outdated: Outdated) -> None:
        if wanted is None:
            return
        last = 0.0

        def progress(share: float, doing: str) -> None:
            nonlocal last
            now = time.monotonic()
            if now - last >= _NOTICE:
                last = now
                self._told.emit(wanted, share, doing)

        found: object
        try:
            found = self._maker.made(wanted, outdated, progress)
        except ComputationCancelled:
            return
        except UserError as error:
            found = str(error)
        except Exception:
            logging.getLogger(__name__).exception("making the report failed")
            found = (
                "The report was not made: something went wrong that should not have. "
                "The layout is as it was; save it."
            )
        self._done.emit(wanted, found)

    # -- in the window's thread -----------------------------------------------------

    def _on_told(self, wanted: object, share: float, doing: str) -> None:
        if wanted is self._asked:
            self.progressed.emit(share, doing)

    def _on_done(self, wanted: object, found: object) -> None:
        if wanted is not self._asked:
            return
        self._asked = None
        if isinstance(found, MadeReport):
            self.made.emit(found)
        else:
            self.refused.emit(str(found))
        self.ended.emit()


def _part(progress: Progress | None, start: float, end: float) -> Progress | None:
    """The progress of a part of the work, as progress of the whole."""
    if progress is None:
        return None
    tell = progress
    return lambda share, text: tell(start + share * (end - start), text)
