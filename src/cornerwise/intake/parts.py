"""All that was read of a campaign, before it is put together."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from ..campaign import InputFile, Settings
from ..errors import Origin
from ..mutations import CycleRequest, Mutations
from .curves import CurvesRead
from .settings import Document
from .summaries import ChargesRead, MediansRead


@dataclass(frozen=True, kw_only=True, slots=True)
class Parts:
    """All that was read, before it is put together."""

    document: Document
    settings: Settings
    listed: Mapping[str, Mutations]
    requests: tuple[CycleRequest, ...]
    curves: CurvesRead
    medians: MediansRead
    charges: ChargesRead
    charges_file: str | None  # None when there is no table of charges
    inputs: tuple[InputFile, ...]

    @property
    def seen(self) -> dict[str, Origin]:
        """Every construct named in a table, and where first."""
        return {**self.charges.seen, **self.medians.seen, **self.curves.seen}

    @property
    def whole(self) -> bool:
        """Whether every table could be read in full, so that something may be called missing."""
        return self.curves.whole and self.medians.whole and self.charges.whole
