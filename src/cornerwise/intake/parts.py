"""All that was read of a campaign, before it is put together."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from ..campaign import Exclusion, InputFile, Settings
from ..errors import Origin
from ..mutations import CycleRequest, Mutations
from .charges import ChargesRead
from .coordinates import Model
from .curves import CurvesRead
from .distances import DistancesRead
from .medians import MediansRead
from .openings import OpeningsRead
from .settings import Document
from .structure import StructureRequest

TableRead = CurvesRead | MediansRead | ChargesRead | OpeningsRead


@dataclass(frozen=True, kw_only=True, slots=True)
class Parts:
    """All that was read, before it is put together."""

    document: Document
    settings: Settings
    listed: Mapping[str, Mutations]
    requests: tuple[CycleRequest, ...]
    exclusions: Mapping[Exclusion, Origin]  # and where each is asked for
    curves: CurvesRead
    medians: MediansRead
    charges: ChargesRead
    openings: OpeningsRead
    distances: DistancesRead
    structure: StructureRequest | None
    model: Model | None  # what the structure's file holds; None when it could not be read
    charges_file: str | None  # None when there is no table of charges
    inputs: tuple[InputFile, ...]
    notes: tuple[str, ...] = ()  # what a reader of the numbers should know of the files

    @property
    def seen(self) -> dict[str, Origin]:
        """Every construct named in a table, and where first."""
        seen: dict[str, Origin] = {}
        for table in self.tables:
            for label, origin in table.seen.items():
                seen.setdefault(label, origin)
        return seen

    @property
    def whole(self) -> bool:
        """Whether every table could be read in full."""
        return all(table.readable and not table.lost for table in self.tables)

    @property
    def tables(self) -> tuple[TableRead, ...]:
        """Every table of constructs."""
        return self.curves, self.medians, self.charges, self.openings

    def surely_without(self, label: str, *tables: TableRead) -> bool:
        """Whether none of `tables` names the construct `label`, nor may have in what could not be read."""
        return all(table.readable and label not in table.seen and label not in table.lost for table in tables)
