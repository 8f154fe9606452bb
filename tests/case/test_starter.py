from __future__ import annotations

import subprocess
import sys
from pathlib import Path

from reactorstage.case import load, starter_case


def test_the_starter_case_is_a_case(tmp_path: Path) -> None:
    path = tmp_path / "new.yaml"
    path.write_text(starter_case(), encoding="utf-8")
    case = load(path)
    assert [s.owner for s in case.train] == ["entry", "bed 1", "gap 1", "bed 2", "effluent"]
    free = [s.bed.inlet_temperature.free for s in case.train if s.bed and s.bed.inlet_temperature]
    assert free == [True, True]


def test_reading_a_case_of_common_units_does_not_load_pint() -> None:
    lead = Path(__file__).parent / "data" / "lead.yaml"
    code = (
        f"import sys; from reactorstage.case import load; load({str(lead)!r}); print('pint' in sys.modules)"
    )
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert run.stdout.strip() == "False"


def test_the_package_itself_loads_nothing_heavy() -> None:
    code = "import sys, reactorstage.case; print(*sorted({'pint', 'pydantic', 'yaml'} & set(sys.modules)))"
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert run.stdout.strip() == ""
