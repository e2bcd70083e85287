"""The command `sweep`: its results, its journal, and runs that end before their time."""

import csv
import json
import os
import random
import signal
import subprocess
import sys
import time
import uuid
import xml.etree.ElementTree as ElementTree
from collections.abc import Callable, Sequence
from fractions import Fraction
from io import BytesIO
from pathlib import Path
from typing import Any

import pytest
from PIL import Image

from cli.cluster import local_cluster
from cli.test_interruption import MARK, all_gone, marked
from cli.test_session import on_a_terminal
from guardbit.cli import cluster
from guardbit.model.sweep import Cost, Grid, Row
from guardbit.study.sweep import front

Guardbit = Callable[..., Any]
Start = Callable[..., "subprocess.Popen[str]"]

SMALL = ["--coefficient-bits", "3..6", "--frac", "auto,2..4", "--fit", "nearest,gain"]
TWO = """[filter]
name = "slope"
[kernel]
column = [1, 2, 1]
row = [1, 0, -1]
divisor = ["sum", 3]
[input]
bits = 8
[output]
bits = 9
signed = true
[intermediate]
bits = 12
frac = 2
"""
MANY = [
    "--coefficient-bits",
    "3..12",
    "--intermediate-bits",
    "8..11",
    "--intermediate-frac",
    "0..4",
]
COUNT = 200


@pytest.fixture
def two(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Return a spec of two passes in the current folder, which is a fresh one."""
    monkeypatch.chdir(tmp_path)
    path = Path("slope.toml")
    path.write_text(TWO)
    return path


def finished(path: str) -> list[int]:
    """Return the numbers of the points in a journal, as often as they stand there."""
    lines = Path(path).read_text().splitlines() if Path(path).exists() else []
    return [json.loads(line)["index"] for line in lines[1:]]


def wait_for_points(
    process: "subprocess.Popen[str]", path: str, count: int, seconds: float = 60
) -> None:
    """Wait until a journal holds `count` points of a sweep that is still running."""
    end = time.monotonic() + seconds
    while len(finished_lines(path)) < count:
        assert process.poll() is None, process.communicate()
        assert time.monotonic() < end, "no points"
        time.sleep(0.01)


def finished_lines(path: str) -> list[str]:
    return Path(path).read_text().splitlines()[1:] if Path(path).exists() else []


def test_the_table_marks_the_front(guardbit: Guardbit, soften: Path) -> None:
    ran = guardbit("sweep", soften, *SMALL)
    assert (ran.status, ran.err) == (0, "")
    assert "soften3  32 points, " in ran.out and "on the Pareto front" in ran.out
    assert "->" in ran.out and "error, LSB" in ran.out
    assert sorted(path.name for path in Path().iterdir()) == ["soften3.toml"]


def test_csv_and_json_say_the_same(guardbit: Guardbit, two: Path) -> None:
    axes = ["--coefficient-bits", "3..5", "--intermediate-bits", "9,12", "--frac", "auto,6"]
    ran = guardbit("sweep", two, *axes, "--response", "--csv", "out.csv", "--json")
    assert ran.status == 0
    sweep = json.loads(ran.out)["sweep"]
    with Path("out.csv").open(newline="") as stream:
        records = list(csv.DictReader(stream))
    assert len(records) == len(sweep["rows"]) == 12
    assert {record["refused"] != "" for record in records} == {True, False}
    for record, row in zip(records, sweep["rows"], strict=True):
        if row["cost"] is None:
            assert record["refused"] == row["refused"]["sentence"] and record["error"] == ""
            continue
        assert Fraction(record["error"]) == Fraction(row["cost"]["error"])
        assert Fraction(record["response"]) == Fraction(row["cost"]["response"])
        assert record["accumulator_bits"].split() == [str(b) for b in row["cost"]["accumulators"]]
        assert (record["front"] == "yes") is (row["index"] in sweep["front"])
        total = 2 * int(record["coefficient_bits"]) + int(record["intermediate_bits"])
        total += sum(map(int, record["accumulator_bits"].split()))
        assert int(record["bits"]) == total


def test_a_point_is_what_size_says_of_it(guardbit: Guardbit, two: Path) -> None:
    ran = guardbit("sweep", two, "--coefficient-bits", "7", "--intermediate-bits", "9", "--json")
    (row,) = json.loads(ran.out)["sweep"]["rows"]
    text = TWO.replace("bits = 12\n", "bits = 9\n") + "[coefficient]\nbits = 7\n"
    Path("one.toml").write_text(text)
    sizing = json.loads(guardbit("size", "one.toml", "--json").out)["specs"][0]["sizing"]
    low, high = (Fraction(sizing["error"][end]) for end in ("low", "high"))
    exact, shown = max(-low, high), Fraction(row["cost"]["error"])
    assert exact <= shown < exact + Fraction(1, 10**9)
    assert row["cost"]["accumulators"] == [r["bits"] for r in sizing["registers"]]


def test_the_front_by_its_definition() -> None:
    draw = random.Random(3)
    pairs = [(draw.randrange(12), Fraction(draw.randrange(12), 4)) for _ in range(60)]
    rows = [row(index, *pair) for index, pair in enumerate(pairs)]
    beaten = [
        any(b <= bits and e <= error and (b, e) != (bits, error) for b, e in pairs)
        for bits, error in pairs
    ]
    assert front(rows) == tuple(index for index, worse in enumerate(beaten) if not worse)
    assert front([]) == ()


def row(index: int, bits: int, error: Fraction) -> Row:
    cost = Cost(1, (0,), 0, None, (2,), bits, -error, error, error, None)
    return Row(index, Grid().point(0), cost, None)


@pytest.mark.parametrize("suffix", ["png", "svg"])
def test_plots(guardbit: Guardbit, soften: Path, suffix: str) -> None:
    names = [f"{each}.{suffix}" for each in ("one", "other")]
    for name in names:
        assert guardbit("sweep", soften, *SMALL, "--plot", name).status == 0
    one, other = (Path(name).read_bytes() for name in names)
    assert one == other
    if suffix == "png":
        with Image.open(BytesIO(one)) as image:
            image.load()
            assert image.format == "PNG" and image.width > 600
    else:
        root = ElementTree.fromstring(one)
        assert root.tag == "{http://www.w3.org/2000/svg}svg"
        assert b"Pareto front" in one


def test_the_same_bytes_whoever_works_and_in_any_order(guardbit: Guardbit, two: Path) -> None:
    for jobs in ("1", "2"):
        named = ["--csv", f"{jobs}.csv", "--journal", f"{jobs}.journal", "--jobs", jobs]
        assert guardbit("sweep", two, *MANY, *named).status == 0
    assert Path("1.csv").read_bytes() == Path("2.csv").read_bytes()
    head, *lines = Path("1.journal").read_text().splitlines()
    assert len(lines) == COUNT
    random.Random(5).shuffle(lines)
    Path("mixed.journal").write_text("\n".join([head, *lines]) + "\n")
    guardbit("sweep", two, *MANY, "--csv", "3.csv", "--journal", "mixed.journal")
    assert Path("1.csv").read_bytes() == Path("3.csv").read_bytes()


@pytest.mark.parametrize(
    ("number", "status", "jobs"),
    [
        (signal.SIGINT, 130, "1"),
        (signal.SIGINT, 130, "2"),
        (signal.SIGTERM, 143, "2"),
        (signal.SIGKILL, -9, "1"),
        (signal.SIGKILL, -9, "2"),
    ],
)
def test_a_sweep_goes_on_where_it_was_ended(
    start: Start, guardbit: Guardbit, two: Path, number: signal.Signals, status: int, jobs: str
) -> None:
    mark = uuid.uuid4().hex
    named = ["--journal", "kept", "--csv", "out.csv"]
    process = start("sweep", two, *MANY, *named, "--jobs", jobs, env={MARK: mark})
    wait_for_points(process, "kept", 20)
    process.send_signal(number)
    process.communicate(timeout=40)
    assert process.returncode == status and all_gone(mark)
    done = len(Path("kept").read_text().splitlines()) - 1
    assert 20 <= done < COUNT and not Path("out.csv").exists()
    assert guardbit("sweep", two, *MANY, *named).status == 0
    assert sorted(finished("kept")) == list(range(COUNT))
    assert guardbit("sweep", two, *MANY, "--csv", "fresh.csv", "--jobs", "1").status == 0
    assert Path("out.csv").read_bytes() == Path("fresh.csv").read_bytes()


def test_the_default_journal_stays_until_the_sweep_is_done(
    start: Start, guardbit: Guardbit, two: Path
) -> None:
    process = start("sweep", two, *MANY, "--jobs", "1")
    end = time.monotonic() + 40
    while not (found := list(Path().glob("slope.sweep-*.journal"))) and time.monotonic() < end:
        time.sleep(0.01)
    wait_for_points(process, str(found[0]), 8)
    process.send_signal(signal.SIGINT)
    process.communicate(timeout=40)
    assert list(Path().glob("slope.sweep-*.journal")) == found
    assert guardbit("sweep", two, *MANY, "--jobs", "1").status == 0
    assert not found[0].exists()


def test_a_worker_that_is_killed_costs_nothing(start: Start, guardbit: Guardbit, two: Path) -> None:
    mark = uuid.uuid4().hex
    named = ["--csv", "out.csv", "--journal", "kept", "--jobs", "2"]
    process = start("sweep", two, *MANY, *named, env={MARK: mark})
    wait_for_points(process, "kept", 10)
    victim = next(pid for pid in marked(mark) if is_worker(pid, process.pid))
    os.kill(victim, signal.SIGKILL)
    assert process.wait(timeout=60) == 0
    assert sorted(finished("kept")) == list(range(COUNT))
    guardbit("sweep", two, *MANY, "--csv", "fresh.csv", "--jobs", "1")
    assert Path("out.csv").read_bytes() == Path("fresh.csv").read_bytes()


def is_worker(pid: int, parent: int) -> bool:
    words = Path(f"/proc/{pid}/cmdline").read_bytes()
    status = Path(f"/proc/{pid}/status").read_text()
    return f"\nPPid:\t{parent}\n" in status and b"spawn_main" in words


def spoilt(change: Callable[[list[str]], Sequence[str]]) -> None:
    lines = Path("kept").read_text().splitlines(keepends=True)
    Path("kept").write_text("".join(change(lines)))


def test_a_torn_last_line_is_done_again(guardbit: Guardbit, soften: Path) -> None:
    guardbit("sweep", soften, *SMALL, "--journal", "kept", "--csv", "one.csv")
    spoilt(lambda lines: [*lines[:10], lines[10][:-9]])
    assert guardbit("sweep", soften, *SMALL, "--journal", "kept", "--csv", "other.csv").status == 0
    assert finished("kept")[:9] == list(range(9)) and sorted(finished("kept")) == list(range(32))
    assert Path("one.csv").read_bytes() == Path("other.csv").read_bytes()


@pytest.mark.parametrize("kept", ["", "{", '{"journal":"guardbit sweep"'])
def test_a_journal_with_a_torn_head_is_begun_anew(
    guardbit: Guardbit, soften: Path, kept: str
) -> None:
    Path("kept").write_text(kept)
    assert guardbit("sweep", soften, *SMALL, "--journal", "kept").status == 0
    assert len(finished("kept")) == 32


@pytest.mark.parametrize(
    ("change", "said"),
    [
        (lambda lines: [*lines[:3], lines[3].replace('"bits"', '"bit"'), *lines[4:]], "kept:4: "),
        (lambda lines: [*lines[:3], "\n", *lines[4:]], "kept:4: "),
        (lambda lines: [lines[0], lines[1].replace('"index":0', '"index":32')], "kept:2: "),
        (
            lambda lines: [lines[0].replace(':"', ':"0', 2), *lines[1:]],
            "not the journal of a sweep",
        ),
        (lambda lines: ["x, y\n", "1, 2\n"], "not the journal of a sweep"),
        (lambda lines: ["keep me"], "not the journal of a sweep"),
    ],
)
def test_a_spoilt_journal_is_refused_and_left_alone(
    guardbit: Guardbit, soften: Path, change: Callable[[list[str]], Sequence[str]], said: str
) -> None:
    guardbit("sweep", soften, *SMALL, "--journal", "kept")
    spoilt(change)
    before = Path("kept").read_bytes()
    ran = guardbit("sweep", soften, *SMALL, "--journal", "kept")
    assert (ran.status, ran.out) == (2, "") and said in ran.err
    assert Path("kept").read_bytes() == before


def test_the_journal_of_another_sweep(guardbit: Guardbit, soften: Path) -> None:
    guardbit("sweep", soften, *SMALL, "--journal", "kept")
    ran = guardbit("sweep", soften, *SMALL[:4], "--journal", "kept")
    assert ran.status == 2 and "journal of another sweep" in ran.err
    soften.write_text(soften.read_text() + "# changed\n")
    ran = guardbit("sweep", soften, *SMALL, "--journal", "kept")
    assert ran.status == 2 and "journal of another sweep" in ran.err


def test_two_sweeps_at_once(guardbit: Guardbit, soften: Path) -> None:
    """Another process that holds the journal, as one that works on it does."""
    hold = "import fcntl, sys, time; f = open('kept', 'a'); fcntl.flock(f, fcntl.LOCK_EX); "
    hold += "print('held', flush=True); time.sleep(60)"
    with subprocess.Popen([sys.executable, "-c", hold], stdout=subprocess.PIPE) as holder:
        assert holder.stdout is not None and holder.stdout.readline() == b"held\n"
        ran = guardbit("sweep", soften, *SMALL, "--journal", "kept")
        holder.kill()
    assert ran.status == 2 and "Another sweep is writing this journal." in ran.err


def test_a_journal_that_cannot_be_written(guardbit: Guardbit, soften: Path) -> None:
    ran = guardbit("sweep", soften, *SMALL, "--journal", "soften3.toml/kept")
    assert ran.status == 3 and "The journal cannot be read or written: " in ran.err
    ran = guardbit("sweep", soften, *SMALL, "--journal", "/dev/full")
    assert ran.status == 2 and "is a device, pipe or socket" in ran.err


def test_points_are_kept_where_the_table_cannot_be_written(
    guardbit: Guardbit, soften: Path
) -> None:
    Path("out.csv").mkdir()
    ran = guardbit("sweep", soften, *SMALL, "--csv", "out.csv")
    assert ran.status == 3 and "a folder of that name is there" in ran.err
    (kept,) = Path().glob("*.journal")
    assert len(finished(str(kept))) == 32
    Path("out.csv").rmdir()
    assert guardbit("sweep", soften, *SMALL, "--csv", "out.csv").status == 0
    assert not kept.exists()


def test_output_may_go_into_a_new_folder(guardbit: Guardbit, soften: Path) -> None:
    ran = guardbit("sweep", soften, *SMALL, "--csv", "new/out.csv", "--plot", "newer/out.svg")
    assert ran.status == 0 and sorted(p.name for p in Path("new").iterdir()) == ["out.csv"]
    assert Path("newer/out.svg").exists()


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (["--coefficient-bits", "4...6"], '"4...6" is no number, no range such as 4..12.'),
        (["--coefficient-bits", ""], '"" is no number'),
        (["--coefficient-bits", "6..4"], '"6..4" ends below its start.'),
        (["--coefficient-bits", "30..40"], '"30..40" is not within 1..32.'),
        (["--frac", "-65"], '"-65" is not within -64..64.'),
        (["--frac", "automatic"], 'nor "auto"'),
        (["--rounding", "up"], '"up" is none of toward-negative'),
        (["--fit", "response"], '"response" is none of nearest, gain.'),
        (["--intermediate-bits", "8"], "--intermediate-bits has nothing to change"),
        (["--plot", "a.jpeg"], "a.jpeg is no file that a plot is written to."),
        (["--jobs", "0"], "Invalid value for '--jobs'"),
    ],
)
def test_wrong_calls(guardbit: Guardbit, soften: Path, arguments: list[str], said: str) -> None:
    ran = guardbit("sweep", soften, *arguments)
    assert (ran.status, ran.out) == (2, "") and said in ran.err
    assert list(Path().iterdir()) == [soften]


@pytest.mark.parametrize(
    ("more", "arguments", "said"),
    [
        ("[coefficient]\nfrac = 4\npinned = [[1]]\n", ["--fit", "gain"], "are pinned"),
        ('[coefficient]\nscale = "exact"\n', ["--frac", "4"], 'scale = "exact"'),
        ('[coefficient]\nfit = "response"\n', ["--frac", "4"], "Add --fit nearest"),
    ],
)
def test_specs_that_leave_nothing_to_vary(
    guardbit: Guardbit, soften: Path, more: str, arguments: list[str], said: str
) -> None:
    start = '[filter]\nname = "a"\n[kernel]\ntaps = [[3]]\n[input]\nbits = 8\n'
    soften.write_text(start + more)
    ran = guardbit("sweep", soften, *arguments)
    assert ran.status == 2 and said in ran.err


def test_open_words_need_an_axis(guardbit: Guardbit, two: Path) -> None:
    text = TWO.replace("bits = 12\nfrac = 2", 'bits = "auto"\nfrac = "auto"')
    two.write_text(text + "[goal]\nerror = 1\n")
    ran = guardbit("sweep", two, "--intermediate-frac", "2")
    assert ran.status == 2 and "Add --intermediate-bits with a range." in ran.err
    axes = ["--coefficient-bits", "6", "--intermediate-frac", "2", "--intermediate-bits", "9"]
    assert guardbit("sweep", two, *axes).status == 0


@pytest.mark.parametrize(
    ("module", "arguments", "extra"),
    [
        ("matplotlib", ["--plot", "a.png"], "guardbit[report]"),
        ("distributed", ["--scheduler", "tcp://127.0.0.1:1"], "guardbit[cluster]"),
    ],
)
def test_without_an_extra(
    guardbit: Guardbit,
    soften: Path,
    monkeypatch: pytest.MonkeyPatch,
    module: str,
    arguments: list[str],
    extra: str,
) -> None:
    for name in [name for name in sys.modules if name.partition(".")[0] == module]:
        monkeypatch.delitem(sys.modules, name)
    monkeypatch.setitem(sys.modules, module, None)
    ran = guardbit("sweep", soften, *SMALL, *arguments)
    assert (ran.status, ran.out) == (3, "") and f"pip install {extra}" in ran.err


def test_time_left_is_told_on_a_terminal(two: Path) -> None:
    said = on_a_terminal(["sweep", str(two), *MANY, "--jobs", "1"], {"TERM": "xterm"})
    assert f"of {COUNT} points" in said and " s left" in said


@pytest.mark.filterwarnings("default")
def test_a_cluster_of_two_workers_one_of_them_killed(
    start: Start, guardbit: Guardbit, two: Path
) -> None:
    Path("cluster").mkdir()
    named = ["--csv", "out.csv", "--journal", "kept"]
    with local_cluster(Path("cluster").resolve(), workers=2) as two_workers:
        process = start("sweep", two, *MANY, *named, "--scheduler", two_workers.address)
        wait_for_points(process, "kept", 10)
        two_workers.workers[0].kill()
        done = len(finished_lines("kept"))
        _, err = process.communicate(timeout=60)
        assert (process.returncode, done < COUNT) == (0, True), err
    assert sorted(finished("kept")) == list(range(COUNT))
    assert guardbit("sweep", two, *MANY, "--csv", "here.csv", "--jobs", "1").status == 0
    assert Path("out.csv").read_bytes() == Path("here.csv").read_bytes()


@pytest.mark.filterwarnings("default")
def test_no_scheduler_there(
    guardbit: Guardbit, soften: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(cluster, "CONNECT_SECONDS", 0.3)
    ran = guardbit("sweep", soften, *SMALL, "--scheduler", "tcp://127.0.0.1:9")
    assert (ran.status, ran.out) == (3, "")
    assert "No scheduler answers at tcp://127.0.0.1:9" in ran.err


@pytest.mark.filterwarnings("default")
def test_a_scheduler_without_workers(
    guardbit: Guardbit, soften: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    Path("cluster").mkdir()
    monkeypatch.setattr(cluster, "CONNECT_SECONDS", 3)
    with local_cluster(Path("cluster").resolve(), workers=0) as empty:
        ran = guardbit("sweep", soften, *SMALL, "--scheduler", empty.address)
    assert ran.status == 3 and "has no workers." in ran.err
