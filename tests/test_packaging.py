"""The wheel holds what the tree holds, and a fresh environment that has only it does the job."""

import os
import shutil
import subprocess
import sys
import sysconfig
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
PARTS: tuple[str, ...] = ("gen", "templates", "pyproject.toml", "README.md", "LICENSE")
PARTS += ("MANIFEST.in", "DEVELOPERS.md", "Makefile")


def run(*command: str | Path, cwd: Path, **environment: str) -> str:
    done = subprocess.run(
        [str(part) for part in command],
        cwd=cwd,
        env={**os.environ, **environment},
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stdout + done.stderr
    return done.stdout


@pytest.fixture(scope="module")
def wheel(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return the wheel, built by way of the source distribution, from a copy of the tree."""
    tree = tmp_path_factory.mktemp("tree")
    for part in PARTS:
        source = ROOT / part
        if source.is_dir():
            ignored = shutil.ignore_patterns("__pycache__", "*.egg-info")
            shutil.copytree(source, tree / part, ignore=ignored)
        else:
            shutil.copy(source, tree / part)
    run(sys.executable, "-m", "build", "--outdir", tree / "dist", cwd=tree)
    (built,) = (tree / "dist").glob("*.whl")
    return built


def test_wheel_holds_the_tree(wheel: Path) -> None:
    with zipfile.ZipFile(wheel) as archive:
        packed = {name for name in archive.namelist() if ".dist-info/" not in name}
    package = ROOT / "gen" / "guardbit"
    wanted = {
        f"guardbit/{path.relative_to(package).as_posix()}"
        for path in package.rglob("*")
        if path.suffix in (".py", ".json", ".typed")
    }
    wanted |= {
        f"guardbit/templates/{path.name}"
        for path in (ROOT / "templates").iterdir()
        if path.suffix in (".py", ".j2")
    }
    assert packed == wanted


def test_a_fresh_environment_does_the_main_job(wheel: Path, tmp_path: Path) -> None:
    """Dependencies come from this environment, the package from the wheel alone."""
    run(sys.executable, "-m", "venv", "--without-pip", "fresh", cwd=tmp_path)
    python = tmp_path / "fresh" / "bin" / "python"
    place = Path(
        run(
            python, "-c", "import sysconfig; print(sysconfig.get_path('purelib'))", cwd=tmp_path
        ).strip()
    )
    with zipfile.ZipFile(wheel) as archive:
        archive.extractall(place)
    # a path file without the editable install's hook: only folders are added
    (place / "dependencies.pth").write_text(sysconfig.get_path("purelib") + "\n")
    told = run(python, "-c", "import guardbit; print(guardbit.__file__)", cwd=tmp_path)
    assert Path(told.strip()).is_relative_to(place)

    work = tmp_path / "work"
    work.mkdir()

    def guardbit(*arguments: str) -> str:
        start = "from guardbit.cli.main import main; main()"
        return run(python, "-c", start, *arguments, cwd=work)

    guardbit("init", "station", "-o", "station.toml")
    assert "accumulator" in guardbit("size", "station.toml")
    guardbit("emit", "station.toml", "-o", "out")
    names = {path.name for path in (work / "out").iterdir()}
    assert names == {"station.h", "station.c", "station_selfcheck.c", "station.cert.json"}
    assert "holds" in guardbit("verify", "station.toml")
