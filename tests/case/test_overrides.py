from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from reactorstage.case import load
from reactorstage.case.fields import Number, Raw
from reactorstage.case.model import Case
from reactorstage.errors import CallError, CaseProblems

Read = Callable[..., Case]
LEAD = Path(__file__).parent / "data" / "lead.yaml"


@pytest.mark.parametrize(
    "name",
    [
        "bed 1.inlet temperature",
        "bed-1.inlet-temperature",
        "Bed 1.Inlet Temperature",
        " bed  1.inlet temperature ",
    ],
)
def test_a_free_number_keeps_its_range(read_lead: Read, name: str) -> None:
    bed = read_lead(overrides=[f"{name}=390 degC"]).train[1].bed
    assert bed and bed.inlet_temperature == Number(663.15, 623.15, 683.15, "temperature")


def test_names_that_can_be_set(read_lead: Read) -> None:
    case = read_lead(
        ("  by-product:", "  tank: {of: train.catalyst, costs: 1 EUR/(t h)}\n  by-product:"),
        overrides=[
            "bed 2.state=bypassed",
            "bed 2.catalyst=3.1 t",
            "bed 3.void fraction=0.5",
            "bed 4.pressure drop factor=0",
            "every bed.catalyst activity=0.8",
            "bed 1.inlet pressure=20 bar(a)",
            "bed 1.injected ethylene=70 kmol/h",
            "feed benzene.flow=900 kmol/h",
            "feed benzene.temperature=200 degC",
            "limit hot exit.at most=420 degC",
            "limit light-off.keep away=2 K",
            "limit slip.at least=0 kmol/h",
            "price by-product.costs=50 EUR/kmol",
            "price tank.earns=2 EUR/(t h)",
            "level air.earns=3 EUR/MWh",
            "level steam 3.5 bar.cools down to=140 degC",
            "level fired heater.capacity=9 MW",
            "effluent.exit temperature=200 degC",
        ],
    )
    beds = [s.bed for s in case.train if s.bed]
    assert beds[1].state == "bypassed" and beds[1].catalyst.now == 3100.0 and beds[2].void_fraction == 0.5
    assert {bed.catalyst_activity.now for bed in beds} == {0.8} and beds[3].pressure_drop_factor.now == 0.0
    assert beds[0].inlet_pressure and beds[0].inlet_pressure.now == 2e6
    split = case.feeds["ethylene"].split
    assert split and split.values["bed 1"].now == pytest.approx(70 / 3.6) and split.values["bed 1"].free
    assert case.feeds["benzene"].flow.now == 250.0 and case.feeds["benzene"].temperature.now == 473.15
    assert case.limits["hot exit"].at_most == Raw("420 degC")
    assert case.limits["light-off"].keep_away == Raw("2 K") and case.limits["slip"].at_least == Raw(
        "0 kmol/h"
    )
    assert case.prices["by-product"].costs == Raw("50 EUR/kmol")
    assert case.prices["tank"].costs is None and case.prices["tank"].earns == Raw("2 EUR/(t h)")
    levels = case.heat_levels.levels if case.heat_levels else {}
    assert levels["air"].costs is None and levels["air"].earns == Raw("3 EUR/MWh")
    assert levels["steam 3.5 bar"].cools_down_to == 413.15 and levels["fired heater"].capacity == 9e6
    assert case.train[-1].steps[0].to == Number(473.15, kind="temperature")


def test_heat_of_a_gap_where_the_case_gives_it(read_lead: Read) -> None:
    given = (
        ("{holds: bed 2.inlet temperature, ", "{heat removed: 1 MW, "),
        (
            "bed 2: {catalyst: 3.0 t, inlet temperature: {now: 384 degC, from: 350 degC, to: 410 degC}}",
            "bed 2: {catalyst: 3.0 t}",
        ),
    )
    assert read_lead(*given, overrides=["gap 1.heat removed=1.5 MW"]).train[2].steps[1].heat == Number(
        1.5e6, kind="power"
    )
    with pytest.raises(CallError, match=r"called 'gap 2\.heat removed' \(nearest: gap 1\.heat removed"):
        read_lead(*given, overrides=["gap 2.heat removed=1.5 MW"])


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("bed 1.inlet temperature", "NAME=VALUE is expected"),
        ("bed 1.inlet temperature=", "NAME=VALUE is expected"),
        ("bed 1.inlet temprature=390 degC", r"nothing that can be set.*nearest: bed 1\.inlet temperature"),
        ("bed 9.catalyst=3 t", "nothing that can be set"),
        ("qqq=3", "nothing that can be set is called 'qqq'$"),
        ("bed 1.inlet temperature=390", "'390' has no unit: a temperature such as"),
        ("bed 1.inlet temperature=390 K/s", "wrong unit: a temperature"),
        ("bed 1.inlet temperature=500 degC", "outside its range 350 degC to 410 degC"),
        ("bed 1.inlet pressure=20 bar", r"write bar\(a\) or bar\(g\)"),
        ("bed 1.state=off", "'off' is not a choice here.*running, bypassed or out"),
        ("bed 4.injected ethylene=60 kmol/h", "bed 4 takes the rest"),
        (
            "feed ethylene.flow=100 kmol/h",
            r"(?s)with --set feed ethylene\.flow=100 kmol/h:.*lead\.yaml:46:.*nothing is left",
        ),
        ("level air.costs=3 EUR/kmol", "written in EUR/MWh"),
        ("limit slip.at most=much", "'much' is not a number"),
    ],
)
def test_wrong_overrides_are_wrong_calls(read_lead: Read, text: str, message: str) -> None:
    with pytest.raises(CallError, match=message):
        read_lead(overrides=[text])


def test_a_name_is_set_once(read_lead: Read) -> None:
    with pytest.raises(CallError, match="set twice"):
        read_lead(overrides=["bed 1.catalyst=3 t", "bed-1.catalyst=4 t"])


def test_a_wrong_file_is_wrong_before_any_override(read_lead: Read) -> None:
    with pytest.raises(CaseProblems, match="'mole' is not a choice"):
        read_lead(("percent: mol", "percent: mole"), overrides=["bed 9.catalyst=3 t"])


@pytest.fixture
def variant(tmp_path: Path, lead_text: str) -> Callable[[str], Case]:
    """Reads a variant of the lead case; both stand in a folder below the one of the tests."""
    (tmp_path / "base.yaml").write_text(lead_text)
    path = tmp_path / "variant.yaml"

    def read(text: str) -> Case:
        path.write_text(text)
        return load(path)

    return read


HEAD = "variant of: base.yaml\nformat: 1\n"


def test_a_variant_changes_values_by_name(variant: Callable[[str], Case]) -> None:
    case = variant(
        f"{HEAD}case: with bed 2 out\nchanges:\n  bed 2.state: bypassed\n"
        "  bed-1.inlet-temperature: 390 degC\n"
        "  bed 3.inlet temperature: {now: 380 degC, from: 370 degC, to: 400 degC}\n"
    )
    beds = [s.bed for s in case.train if s.bed]
    assert case.name == "with bed 2 out" and beds[1].state == "bypassed"
    assert beds[0].inlet_temperature == Number(663.15, 623.15, 683.15, "temperature")
    assert beds[2].inlet_temperature == Number(653.15, 643.15, 673.15, "temperature")
    problem = case.problem(("train", 5, "bed 3", "inlet temperature", "from"), "x")
    assert (Path(problem.file).name, problem.line, problem.column) == ("variant.yaml", 7, 50)
    assert Path(case.problem(("fluid",), "x").file).name == "base.yaml"


def test_hash_of_a_variant_is_that_of_what_it_comes_to(
    variant: Callable[[str], Case], read_lead: Read
) -> None:
    assert variant(f"{HEAD}changes: {{bed 1.catalyst: 2.7 t}}").hash == read_lead(("2.6 t", "2.7 t")).hash


def test_a_variant_without_changes_is_the_case(variant: Callable[[str], Case]) -> None:
    assert variant(HEAD).hash == load(LEAD).hash


@pytest.mark.parametrize(
    ("text", "file", "line", "column", "message"),
    [
        (f"{HEAD}changes:\n  bed 2.stat: bypassed\n", "variant.yaml", 4, 3, "nothing that can be set"),
        (f"{HEAD}changes:\n  bed 2.catalyst: 3 K\n", "variant.yaml", 4, 19, "wrong unit: a mass"),
        (f"{HEAD}changes:\n  bed 2.catalyst:\n", "variant.yaml", 4, 18, "nothing is written here"),
        (
            f"{HEAD}changes:\n  bed 1.inlet temperature: 500 degC\n",
            "variant.yaml",
            4,
            28,
            "outside its range",
        ),
        (
            f"{HEAD}changes: {{feed ethylene.flow: 9 kmol/h}}",
            "base.yaml",
            46,
            74,
            "with the changes of .*variant.yaml",
        ),
        (f"{HEAD}change: {{}}", "variant.yaml", 3, 1, "'change' is not a key"),
        ("variant of: base.yaml\n", "variant.yaml", 1, 1, "format is missing"),
        ("variant of: none.yaml\nformat: 1", "variant.yaml", 1, 13, "there is no file 'none.yaml'"),
        ("variant of: variant.yaml\nformat: 1", "variant.yaml", 1, 13, "is a variant itself"),
        ("variant of: [base.yaml]\nformat: 1", "variant.yaml", 1, 1, "text is expected here, not a list"),
    ],
)
def test_wrong_variants(
    variant: Callable[[str], Case], text: str, file: str, line: int, column: int, message: str
) -> None:
    with pytest.raises(CaseProblems, match=message) as caught:
        variant(text)
    first = caught.value.problems[0]
    assert (Path(first.file).name, first.line, first.column) == (file, line, column)


def test_a_broken_base_is_reported_in_the_base(variant: Callable[[str], Case], tmp_path: Path) -> None:
    (tmp_path / "base.yaml").write_text("a: [1")
    with pytest.raises(CaseProblems, match=r"base\.yaml:1:6: error: not YAML"):
        variant(HEAD)
