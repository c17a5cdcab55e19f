"""Coverage-guided fuzzing of one reader; run by hand, see DEVELOPERS.md.

    python tests/fuzz/explore.py KIND FOLDER [options of libFuzzer, such as -runs=20000]

KIND is a name of `readers.READERS` or ``result``. FOLDER keeps the inputs that reached something new, from
one run to the next. Needs the package ``atheris``, which nothing else here does. The first input of each
fault, one that is neither read nor refused, is kept beside FOLDER as ``fault-...`` and its traceback printed;
so is one that takes long, as ``slow-...``. How many were read and refused is told as it goes.
"""

from __future__ import annotations

import random
import shutil
import sys
import tempfile
import time
import traceback
from collections import Counter
from pathlib import Path

import atheris

sys.path.insert(0, str(Path(__file__).parent))
with atheris.instrument_imports(include=["cornerwise", "tomllib", "openpyxl"]):
    import readers

    import cornerwise.intake  # noqa: F401 - `cornerwise` itself fetches it later, past the instruments

LONGEST = 6000  # bytes of an input; more for workbooks and results
SLOWEST_S = 2.0
FRESH = 0.5  # how often an input is made from a whole file rather than from one found before

_VALUES = (
    "", "0", "-0", "1e308", "1e-320", "1e999", "nan", "-inf", "0,5", "1.234,5", "1,234.5", "1 000", "−40",
    "4O", "0x10", "1_000", "٣", "½", "#N/A", "'1", "=1+1", "NA", "TRUE", "\N{NO-BREAK SPACE}1",
    "1\u200b", "\ud83d",
    "E181A", "r212q", "p.(Arg212Gln)", "E181A+R212Q", "c1", "500", "-500.0001", "100", "9" * 400, "x" * 2000,
)  # fmt: skip


def _changed(text: str, chance: random.Random) -> str:
    """A text table with one thing changed, as a hand or a program might."""
    lines = text.split("\n")
    mark = max(",;\t", key=lines[0].count)
    row = chance.randrange(len(lines))
    fields = lines[row].split(mark)
    at = chance.randrange(len(fields))
    what = chance.randrange(9)
    if what == 0:
        fields[at] = chance.choice(_VALUES)
    elif what == 1:
        fields[at] = f'"{fields[at]}"'
    elif what == 2:
        fields.insert(at, chance.choice(_VALUES))
    elif what == 3:
        fields[at] = chance.choice(chance.choice(lines).split(mark))
    lines[row] = mark.join(fields)
    if what == 4:
        lines.insert(row, chance.choice(["", "# note", mark * 3, " ", lines[row]]))
    elif what == 5:
        del lines[row]
    elif what == 6:
        other = chance.randrange(len(lines))
        lines[row], lines[other] = lines[other], lines[row]
    elif what == 7:
        lines = [line.replace(mark, chance.choice(",;\t")) for line in lines]
    elif what == 8:
        return "\r\n".join(lines)
    return "\n".join(lines)


def _table(data: bytes, most: int, seed: int) -> bytes:
    """One step away from a text: a thing changed, another encoding, or any bytes."""
    chance = random.Random(seed)
    if chance.random() < 0.3:
        return atheris.Mutate(data, most)
    text = data.decode("utf-8", "replace")
    for _ in range(chance.choice((1, 1, 1, 2, 4))):
        text = _changed(text, chance)
    encoding = chance.choice(("utf-8",) * 5 + ("utf-8-sig", "utf-16", "utf-16-be", "cp1252", "utf-32"))
    return text.encode(encoding, "replace")[:most]


def _workbook(data: bytes, most: int, seed: int) -> bytes:
    """One step away from a workbook, in one of the files inside."""
    chance = random.Random(seed)
    try:
        parts = readers.parts_of(data)
    except Exception:
        return atheris.Mutate(data, most)
    if not parts or chance.random() < 0.05:
        return atheris.Mutate(data, most)
    read = [name for name in parts if "docProps" not in name and "theme" not in name]
    name = chance.choice(read or sorted(parts))
    parts[name] = atheris.Mutate(parts[name], len(parts[name]) + 400)
    if chance.random() < 0.03:
        del parts[name]
    packed = readers.packed(parts)
    return packed if len(packed) <= most else data


def _sealed(data: bytes, most: int, seed: int) -> bytes:
    return readers.sealed(atheris.Mutate(data, most - 200))[:most]


_MUTATORS = {"sheet": _workbook, "book": _workbook, "result": _sealed}


def _where(error: Exception) -> str:
    """Kind of an exception and the line that raised it, to tell faults apart."""
    frame = traceback.extract_tb(error.__traceback__)[-1]
    return f"{type(error).__name__} at {Path(frame.filename).name}:{frame.lineno}"


def main() -> None:
    kind, folder, *options = sys.argv[1:]
    corpus = Path(folder)
    corpus.mkdir(parents=True, exist_ok=True)
    seeds = readers.READERS[kind].seeds if kind in readers.READERS else (readers.small_result(),)
    for number, seed in enumerate(seeds):
        (corpus / f"seed-{number}").write_bytes(seed)
    work = Path(tempfile.mkdtemp(dir="/dev/shm" if Path("/dev/shm").is_dir() else None))
    outcomes: Counter[str] = Counter()

    def one(data: bytes) -> None:
        began = time.monotonic()
        try:
            outcome: str = readers.judge(kind, data, work)
        except Exception as error:
            outcome = _where(error)
            if outcome not in outcomes:
                place = corpus.parent / f"fault-{kind}-{sum(1 for name in outcomes if ':' in name)}"
                place.write_bytes(data)
                traceback.print_exception(error, limit=-6)
                print(f"{outcome}, kept as {place}", file=sys.stderr, flush=True)
        if time.monotonic() - began > SLOWEST_S:
            (corpus.parent / f"slow-{kind}-{outcomes['slow']}").write_bytes(data)
            outcomes["slow"] += 1
        outcomes[outcome] += 1
        if sum(outcomes.values()) % 1000 == 0:
            print(kind, dict(outcomes), file=sys.stderr, flush=True)

    def mutated(data: bytes, most: int, seed: int) -> bytes:
        chance = random.Random(seed)
        base = chance.choice(seeds) if chance.random() < FRESH else data
        return _MUTATORS.get(kind, _table)(base, most, seed)

    longest = max(LONGEST, *(2 * len(seed) for seed in seeds))
    arguments = [
        *(sys.argv[0], str(corpus), f"-max_len={longest}", "-len_control=0", "-timeout=20"),
        *("-rss_limit_mb=2048", f"-artifact_prefix={corpus.parent / 'crash-'}{kind}-", *options),
    ]
    try:
        atheris.Setup(arguments, one, custom_mutator=mutated)
        atheris.Fuzz()
    finally:
        shutil.rmtree(work, ignore_errors=True)


if __name__ == "__main__":
    main()
