"""The wheel, installed elsewhere and run from another folder, does what the checkout does."""

import json
import subprocess
import sys
import venv
import zipfile
from pathlib import Path

ROOT = Path(__file__).parents[1]

DOCUMENT = """\
auditor: 1
parameter_sets:
  - name: short
    modulus: {group: modp768}
"""


def test_the_wheel_does_the_same(tmp_path: Path) -> None:
    """It holds rules, templates and schemas, and its command writes the same report."""
    subprocess.run(
        [sys.executable, "-m", "build", "--wheel", "--no-isolation", "--outdir", tmp_path, ROOT],
        check=True,
        capture_output=True,
    )
    (wheel,) = tmp_path.glob("*.whl")
    names = zipfile.ZipFile(wheel).namelist()
    assert "auditor/rules/group-structure.yaml" in names
    assert "auditor/reports/report.schema.json" in names
    assert "auditor/py.typed" in names
    assert not [name for name in names if name.startswith(("tests", "rules", "reports"))]

    # Dependencies come from this environment; the package itself from the wheel alone.
    environment = tmp_path / "environment"
    venv.create(environment, with_pip=True, system_site_packages=False)
    python = environment / "bin" / "python"
    subprocess.run(
        [python, "-m", "pip", "install", "--quiet", "--no-deps", wheel],
        check=True,
        capture_output=True,
    )
    site = next((environment / "lib").glob("python*/site-packages"))
    ours = [path for path in sys.path if path.endswith("site-packages")]
    (site / "dependencies.pth").write_text("\n".join(ours))
    folder = tmp_path / "elsewhere"
    folder.mkdir()
    (folder / "short.yaml").write_text(DOCUMENT)
    words = ["review", "short.yaml", "--effort", "quick", "--as-of", "2026-12-01", "--no-ledger"]

    def report(*command: str | Path) -> bytes:
        subprocess.run(
            [*command, *words, "--json", "r.json", "--html", "r.html", "--markdown", "r.md"],
            cwd=folder,
            check=False,
            capture_output=True,
        )
        return (folder / "r.json").read_bytes()

    installed = report(environment / "bin" / "auditor")
    code = "import sys; from auditor.cli import run; sys.exit(run())"
    assert json.loads(installed)["parameter_sets"][0]["position"] == "hold"
    assert installed == report(sys.executable, "-c", code)
    where = "import auditor, pathlib; print(pathlib.Path(auditor.__file__).parent)"
    found = subprocess.run(
        [python, "-c", where], cwd=folder, check=True, capture_output=True, text=True
    )
    assert Path(found.stdout.strip()).is_relative_to(environment)
