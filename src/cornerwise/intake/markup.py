"""The XML of a workbook as a stream of beginnings, texts and ends; no entities, no document types."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from xml.parsers import expat

from .package import DamagedBook

DEEPEST = 100  # elements inside one another

Begin = Callable[[str, Mapping[str, str]], None]
End = Callable[[str], None]
Text = Callable[[str], None]

_NAMESPACES = (
    "http://schemas.openxmlformats.org/spreadsheetml/2006/main",
    "http://purl.oclc.org/ooxml/spreadsheetml/main",
    "http://schemas.openxmlformats.org/package/2006/relationships",
)


def parse(pieces: Iterable[bytes], name: str, *, begin: Begin, end: End, text: Text | None = None) -> None:
    """Call back for every element of the spreadsheet's own vocabulary.

    Parameters
    ----------
    pieces : iterable of bytes
        The part.
    name : str
        Its name, for the reason.
    begin, end, text : callable
        Called with an element's name and attributes, with its name, and with text. Elements of other
        vocabularies come with an empty name. The namespace of an attribute is left on it.

    Raises
    ------
    DamagedBook
        If the part is no XML, declares a document type, or is nested too deep.
    """
    parser = expat.ParserCreate(namespace_separator=" ")
    parser.buffer_text = True
    depth = 0

    def began(element: str, attributes: dict[str, str]) -> None:
        nonlocal depth
        depth += 1
        if depth > DEEPEST:
            raise DamagedBook(f"{name} in it has more than {DEEPEST} elements inside one another")
        begin(_own(element), attributes)

    def ended(element: str) -> None:
        nonlocal depth
        depth -= 1
        end(_own(element))

    def doctype(*_: object) -> None:
        raise DamagedBook(f"{name} in it declares a document type, which no workbook does")

    parser.StartElementHandler, parser.EndElementHandler = began, ended
    parser.StartDoctypeDeclHandler = doctype
    if text is not None:
        parser.CharacterDataHandler = text
    try:
        for piece in pieces:
            parser.Parse(piece, False)
        parser.Parse(b"", True)
    except (expat.ExpatError, ValueError, LookupError) as error:
        if isinstance(error, DamagedBook):
            raise
        raise DamagedBook(f"it is damaged: {name} is no XML ({error})") from None


def _own(element: str) -> str:
    namespace, _, local = element.rpartition(" ")
    return local if namespace in _NAMESPACES else ""
