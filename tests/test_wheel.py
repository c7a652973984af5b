"""The wheel carries devices and examples and works where only the five packages and what they bring can be imported."""

from __future__ import annotations

import importlib.metadata
import os
import re
import subprocess
import sys
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parent.parent
RUN_TIME = ("numpy", "scipy", "matplotlib", "pint", "typer")


def brought(names: tuple[str, ...]) -> set[str]:
    """Distributions that these bring, themselves included."""
    seen: set[str] = set()
    todo = list(names)
    while todo:
        name = re.sub(r"[-_.]+", "-", todo.pop()).lower()
        if name in seen:
            continue
        try:
            requires = importlib.metadata.requires(name) or []
        except importlib.metadata.PackageNotFoundError:
            continue  # an optional one that this platform does not have
        seen.add(name)
        todo += [re.split(r"[\s;<>=!~\[(]", line)[0] for line in requires if "extra ==" not in line]
    return seen


@pytest.fixture(scope="module")
def site(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder with the wheel unpacked and links to the run-time distributions, nothing else."""
    folder = tmp_path_factory.mktemp("wheel")
    # hatchling is a test dependency, so that no isolated environment (and no network) is needed
    command = [sys.executable, "-m", "build", "--wheel", "--no-isolation", "--outdir", str(folder), str(ROOT)]
    subprocess.run(command, check=True, capture_output=True)
    site = folder / "site"
    with zipfile.ZipFile(next(folder.glob("*.whl"))) as wheel:
        wheel.extractall(site)
    for name in sorted(brought(RUN_TIME)):
        for file in importlib.metadata.files(name) or []:
            top = file.parts[0]
            source, link = Path(str(file.locate())), site / top
            if top in {"..", "__pycache__"} or link.exists():
                continue
            root = source
            for _ in range(len(file.parts) - 1):
                root = root.parent
            link.symlink_to(root)
    return site


def run(site: Path, cwd: Path, *arguments: str) -> subprocess.CompletedProcess[str]:
    program = (
        "import sys; sys.path[:] = [p for p in sys.path if 'site-packages' not in p]; "
        f"sys.path.insert(0, {str(site)!r}); from soacheck.cli import main; sys.exit(main())"
    )
    environment = {**os.environ, "PYTHONPATH": "", "PYTHONNOUSERSITE": "1"}
    return subprocess.run(
        [sys.executable, "-I", "-c", program, *arguments],
        cwd=cwd,
        env=environment,
        capture_output=True,
        text=True,
        check=False,
    )


def test_demo_and_check_run_from_the_wheel_alone(site: Path, tmp_path: Path) -> None:
    demo = run(site, tmp_path, "demo", "examples")
    assert (demo.returncode, demo.stderr) == (0, "")
    done = run(site, tmp_path, "check", "examples/greenhouse-vent.toml")
    assert done.returncode == 0, done.stdout + done.stderr
    assert "within" in done.stdout


def test_the_wheel_carries_devices_and_examples(site: Path) -> None:
    devices = {path.name for path in (ROOT / "devices").glob("*.toml")}
    assert devices
    assert {path.name for path in (site / "soacheck" / "_devices").glob("*.toml")} == devices
    assert list((site / "soacheck" / "examples").glob("*.toml"))
    assert (site / "soacheck" / "py.typed").exists()
