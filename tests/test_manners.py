"""The command line among shells, pipes, terminals, signals, locales and the files of other systems."""

import fcntl
import io
import json
import os
import pty
import re
import shutil
import signal
import struct
import subprocess
import sys
import termios
import time
from collections.abc import Mapping, Sequence
from pathlib import Path

import pytest

import cornerwise
from cornerwise import console
from cornerwise.errors import DataRefused
from fuzz.readers import CURVES, LABELS, MEASURED, READERS, REPLICATES, STATED
from intake.writing import content

PUBLISHED = Path(__file__).parents[1] / "cycles" / "published-medians"
COMMAND = [sys.executable, "-m", "cornerwise"]
PROGRESS = re.compile(r"cornerwise: [\w ]+, \d+ of \d+\n")


def _run(*words: object, **changes: str) -> subprocess.CompletedProcess[bytes]:
    environment = {**os.environ, **changes}
    return subprocess.run([*COMMAND, *map(str, words)], capture_output=True, env=environment, check=False)


def _campaign(folder: Path, label: str = "WT", title: str = "") -> Path:
    folder.mkdir()
    settings = STATED.replace(b"WT", label.encode()) + f'title = "{title}"\nreplicates = 1000\n'.encode()
    (folder / "campaign.toml").write_bytes(settings)
    (folder / "curves.csv").write_bytes(re.sub(rb"(?m)^WT,", label.encode() + b",", CURVES))
    return folder


# Locales and encodings


@pytest.mark.parametrize("encoding", ["ascii", "cp1252", "utf-8"])
@pytest.mark.parametrize(
    "words",
    [["check"], ["couple"], ["rank"], ["explain", "E181A/R212Q"], ["check", "--json"], ["couple", "--json"]],
    ids=" ".join,
)
def test_every_character_is_shown_or_spelt_in_any_locale(
    words: list[str], encoding: str, tmp_path: Path
) -> None:
    path = _campaign(tmp_path / "a", label="Δα–wt", title="Ångström ± протеин")
    done = _run(words[0], path, *words[1:], PYTHONIOENCODING=encoding)
    assert done.returncode == 0, done.stderr
    if "--json" in words:
        assert json.loads(done.stdout.decode("utf-8"))["settings"]["title"] == "Ångström ± протеин"
    else:
        assert "?" not in done.stdout.decode(encoding).split("\n")[0]


def test_the_plainest_locale(tmp_path: Path) -> None:
    path = _campaign(tmp_path / "ä", title="Ångström")
    changes = {"LC_ALL": "C", "LANG": "C", "PYTHONUTF8": "0", "PYTHONCOERCECLOCALE": "0"}
    done = _run("couple", path, "--out", tmp_path / "ö", **changes)
    assert done.returncode == 0, done.stderr
    assert b"\\xc5ngstr\\xf6m" in done.stdout
    assert (tmp_path / "ö" / "result.json").is_file()
    refused = _run("check", tmp_path / "ü", **changes)
    assert refused.returncode == 3
    assert b"Traceback" not in refused.stderr


@pytest.mark.skipif(sys.platform == "darwin", reason="that system allows no such names")
def test_a_path_that_is_no_text(tmp_path: Path) -> None:
    folder = os.fsencode(tmp_path) + b"/\xff\xfe"
    shutil.copytree(os.fsencode(PUBLISHED), folder)
    done = subprocess.run([*COMMAND, "check", folder], capture_output=True, check=False)
    assert done.returncode == 0, done.stderr
    book = os.fsencode(tmp_path) + b"/\xff.xlsx"
    Path(os.fsdecode(book)).write_bytes(READERS["book"].seeds[0])
    told = subprocess.run([*COMMAND, "couple", book, "--json"], capture_output=True, check=False)
    assert json.loads(told.stdout.decode("utf-8"))["inputs"][0]["name"] == "\\udcff.xlsx"


# Terminals


def _on_terminal(words: Sequence[object], width: int, **changes: str) -> tuple[int, str]:
    """Exit code and what a terminal of this width was sent."""
    ours, theirs = pty.openpty()
    fcntl.ioctl(theirs, termios.TIOCSWINSZ, struct.pack("HHHH", 50, width, 0, 0))
    kept = {k: v for k, v in os.environ.items() if k not in ("COLUMNS", "LINES", "NO_COLOR", "TERM")}
    process = subprocess.Popen(
        [*COMMAND, *map(str, words)], stdin=theirs, stdout=theirs, stderr=theirs, env={**kept, **changes}
    )
    os.close(theirs)
    sent = b""
    while True:
        try:
            piece = os.read(ours, 65536)
        except OSError:  # how a terminal says that its last user is gone
            break
        if not piece:
            break
        sent += piece
    os.close(ours)
    return process.wait(), sent.decode().replace("\r\n", "\n")


_ESCAPE = re.compile(r"\x1b\[[0-9;]*m")


@pytest.mark.parametrize("width", [40, 80, 200])
@pytest.mark.parametrize("command", ["check", "couple", "rank"])
def test_tables_keep_to_the_terminal(command: str, width: int) -> None:
    code, sent = _on_terminal([command, PUBLISHED], width, TERM="xterm-256color")
    assert code == 0
    assert "±" in sent or command == "rank"
    plain = _ESCAPE.sub("", sent)
    assert max(len(line.rstrip()) for line in plain.split("\n")) <= width
    assert "S411A" in plain


@pytest.mark.parametrize(
    ("changes", "allowed"),
    [
        ({"TERM": "xterm-256color"}, None),
        ({"TERM": "xterm-256color", "NO_COLOR": "1"}, {"\x1b[0m", "\x1b[1m"}),
        ({"TERM": "dumb"}, set()),
    ],
    ids=["colour", "NO_COLOR", "dumb"],
)
def test_colours_only_where_they_are_wanted(changes: Mapping[str, str], allowed: set[str] | None) -> None:
    code, sent = _on_terminal(["couple", PUBLISHED], 100, **changes)
    assert code == 0
    found = set(_ESCAPE.findall(sent))
    if allowed is None:
        assert any("[3" in one for one in found)
    else:
        assert found <= allowed
    assert not _ESCAPE.search(_run("couple", PUBLISHED, **changes).stdout.decode())


class _Screen(io.StringIO):
    def isatty(self) -> bool:
        return True


@pytest.mark.parametrize("terminal", ["xterm", "dumb"])
def test_progress_takes_one_line_of_a_terminal_and_goes(
    terminal: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("TERM", terminal)
    monkeypatch.setattr(console, "_PATIENCE_S", 0.0)
    monkeypatch.setattr(sys, "stderr", screen := _Screen())

    def interrupted() -> None:
        with console.progress() as told:
            for done in (1, 2, 3):
                told("medians", done, 3)
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        interrupted()
    said = [f"cornerwise: medians, {done} of 3" for done in (1, 2, 3)]
    if terminal == "dumb":
        assert screen.getvalue().splitlines() == said
    else:
        clear = "\r\x1b[K"
        assert screen.getvalue() == clear + clear.join(said) + clear


def test_progress_says_nothing_of_what_is_quick(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sys, "stderr", screen := _Screen())
    with console.progress() as told:
        told("medians", 1, 3)
    assert screen.getvalue() == ""


# Pipes


def _into_nothing(words: str) -> subprocess.CompletedProcess[str]:
    line = f"{sys.executable} -m cornerwise {words} | true; echo ${{PIPESTATUS[0]}}"
    return subprocess.run(["bash", "-c", line], capture_output=True, text=True, check=False)


@pytest.mark.parametrize(
    "words",
    ["--help", "couple --help", "--version", "check PATH", "couple PATH", "rank PATH", "couple PATH --json"],
)
def test_readers_that_go_away_are_no_fault(words: str) -> None:
    done = _into_nothing(words.replace("PATH", str(PUBLISHED)))
    assert done.stdout.strip() == "0"
    assert PROGRESS.sub("", done.stderr) == ""


def test_a_refusal_keeps_its_code_when_its_reader_goes_away(tmp_path: Path) -> None:
    assert _into_nothing(f"check {tmp_path / 'none'}").stdout.strip() == "3"


def _rendered(given: bytes, out: Path) -> subprocess.CompletedProcess[bytes]:
    words = [*COMMAND, "render", "-", "--out", str(out)]
    return subprocess.run(words, input=given, capture_output=True, check=False)


def test_render_reads_standard_input_and_a_folder(tmp_path: Path) -> None:
    told = _run("couple", PUBLISHED, "--json").stdout
    done = _rendered(told, tmp_path / "a")
    assert done.returncode == 0, done.stderr
    assert (tmp_path / "a" / "result.json").read_bytes() == told
    again = _run("render", tmp_path / "a", "--out", tmp_path / "b")
    assert again.returncode == 0, again.stderr
    nothing = _rendered(b"", tmp_path / "c")
    assert nothing.returncode == 3
    assert b"standard input" in nothing.stderr


# Signals


@pytest.mark.parametrize(("number", "code"), [(signal.SIGINT, 130), (signal.SIGTERM, 143)])
@pytest.mark.parametrize("figures", [False, True])
def test_a_stopped_run_says_so_and_leaves_nothing_behind(
    number: signal.Signals, code: int, figures: bool, tmp_path: Path
) -> None:
    place = tmp_path / "place"
    place.mkdir()
    words = [*COMMAND, "couple", PUBLISHED.parent / "orvane", "--out", place / "out"]
    process = subprocess.Popen(
        [*words, "--figures"] if figures else words,
        stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, start_new_session=True,
        preexec_fn=lambda: signal.signal(signal.SIGINT, signal.default_int_handler),
    )  # fmt: skip
    assert process.stderr is not None
    told = ""
    while figures and not told.startswith("cornerwise: "):  # it says so when it has worked for a second
        told = process.stderr.readline()
        assert told, "it ended by itself"
    time.sleep(0.7)
    if number == signal.SIGINT:  # as a terminal does, to all processes of the run
        os.killpg(process.pid, number)
    else:
        process.send_signal(number)
    output, errors = process.communicate(timeout=60)
    assert process.returncode in (code, -number)  # the latter while it is loading
    assert output == ""
    stopped = "cornerwise: stopped; no output was left half written\n"
    assert PROGRESS.sub("", errors) == (stopped if process.returncode == code else "")
    left = [path.name for path in place.iterdir()]
    assert left == [] or (left == ["out"] and (place / "out" / "result.json").is_file())


# Shells and help


def _as_installed(*words: str, **changes: str) -> subprocess.CompletedProcess[str]:
    code = "import sys; sys.argv[0] = 'cornerwise'; from cornerwise.cli import main; main()"
    environment = {**os.environ, **changes}
    line = [sys.executable, "-c", code, *words]
    return subprocess.run(line, capture_output=True, text=True, env=environment, check=False)


def test_completion_offers_commands_and_options() -> None:
    def offered(line: str) -> list[str]:
        changes = {"COMP_WORDS": line, "COMP_CWORD": str(line.count(" "))}
        return _as_installed(_CORNERWISE_COMPLETE="complete_bash", **changes).stdout.split()

    assert offered("cornerwise co") == ["couple"]
    assert "--figures" in offered("cornerwise couple --f")
    assert "--show-completion" in _as_installed("--help").stdout


@pytest.mark.parametrize(
    ("words", "code", "match"),
    [
        (["cuople"], 2, "Did you mean 'couple'"),
        (["couple", "x", "--outt", "y"], 2, "--out"),
        (["couple"], 2, "PATH"),
        (["explain", PUBLISHED, "S411A/F433B"], 2, "did you mean S411A/F433A"),
        (["check", PUBLISHED.parent / "published-median"], 3, "did you mean .*published-medians"),
        (["check", PUBLISHED.parent], 3, "did you mean the folder .*orvane"),
        (["check", PUBLISHED / "medians.csv"], 3, "give the folder that holds campaign.toml"),
    ],
    ids=["command", "option", "argument", "cycle", "path", "folder above", "table"],
)
def test_errors_say_what_to_do_next(words: list[object], code: int, match: str) -> None:
    done = _run(*words)
    assert done.returncode == code
    assert re.search(match, re.sub(r"\s+", " ", done.stderr.decode()))
    assert done.stdout == b""


def test_every_exit_code_is_documented() -> None:
    readme = (Path(__file__).parents[1] / "README.md").read_text(encoding="utf-8")
    for page in (readme.split("Exit codes: ")[1].split(";")[0], _run("--help").stdout.decode()):
        told = page.partition("Exit codes:")[2] or page
        assert re.findall(r"\b\d+\b", told.split("signal")[0])[:6] == ["0", "1", "2", "3", "130", "143"]


# Files of other systems


@pytest.mark.parametrize("end", ["\r\n", "\r", "\n"], ids=["CRLF", "CR", "LF"])
def test_line_ends_of_any_system(end: str, tmp_path: Path) -> None:
    path, same = _campaign(tmp_path / "a"), _campaign(tmp_path / "b")
    for file in same.iterdir():
        file.write_bytes(file.read_bytes().replace(b"\n", end.encode()))
    assert content(cornerwise.read(path)) == content(cornerwise.read(same))


def test_names_in_any_case_and_what_other_programs_leave(tmp_path: Path) -> None:
    path, other = _campaign(tmp_path / "a"), tmp_path / "b"
    other.mkdir()
    (other / "Campaign.TOML").write_bytes((path / "campaign.toml").read_bytes())
    (other / "CURVES.CSV").write_bytes((path / "curves.csv").read_bytes())
    left = (".DS_Store", "Thumbs.db", "desktop.ini", "~$curves.xlsx", "._curves.csv", ".~lock.curves.csv#")
    for name in left:
        (other / name).write_bytes(b"\0\1\2")
    (other / "__MACOSX").mkdir()
    (other / "__MACOSX" / "curves.csv").write_bytes(b"\0")
    assert content(cornerwise.read(path)) == content(cornerwise.read(other))


def test_letters_composed_or_not_are_one_label(tmp_path: Path) -> None:
    (tmp_path / "campaign.toml").write_bytes(MEASURED.replace(b"WT", "sauvagé".encode()))
    (tmp_path / "curves.csv").write_bytes(CURVES.replace(b"WT,", "sauvage\u0301,".encode()))
    (tmp_path / "charges.csv").write_bytes(REPLICATES.replace(b"WT,", "sauvagé,".encode()))
    campaign = cornerwise.read(tmp_path)
    assert campaign.constructs[0].label == "sauvagé"
    assert len(campaign.constructs) == len(LABELS)


@pytest.mark.parametrize("what", ["folder", "fifo", "device", "lost link", "link elsewhere"])
def test_what_is_called_like_a_table_and_is_no_file(what: str, tmp_path: Path) -> None:
    path = _campaign(tmp_path / "a")
    table, elsewhere = path / "curves.csv", tmp_path / "elsewhere.csv"
    table.rename(elsewhere)
    if what == "folder":
        table.mkdir()
    elif what == "fifo":
        os.mkfifo(table)
    else:
        target = {"device": Path("/dev/zero"), "lost link": path / "none.csv", "link elsewhere": elsewhere}
        table.symlink_to(target[what])
    expected = r"curves\.csv: found (a folder, a device or a link|a link to something outside)"
    with pytest.raises(DataRefused, match=expected):
        cornerwise.read(path)


def test_a_link_inside_the_folder_and_a_link_to_the_folder(tmp_path: Path) -> None:
    path = _campaign(tmp_path / "a")
    before = content(cornerwise.read(path))
    (path / "data").mkdir()
    (path / "curves.csv").rename(path / "data" / "points.csv")
    (path / "curves.csv").symlink_to(Path("data") / "points.csv")
    (tmp_path / "link").symlink_to(path)
    assert content(cornerwise.read(tmp_path / "link")) == before
