"""The lead case as it is read: numbers by closed form from the text of the file."""

from __future__ import annotations

import pickle
from collections.abc import Callable
from pathlib import Path

import pytest
import yaml

from reactorstage.case import load
from reactorstage.case.fields import Number, Raw
from reactorstage.case.model import Case
from reactorstage.case.reading import load_data

LEAD = Path(__file__).parent / "data" / "lead.yaml"
Read = Callable[..., Case]


def test_head_of_the_lead_case() -> None:
    case = load(LEAD)
    assert case.name == "Selkemouth Works, four-bed ethylation"
    assert (case.format, case.percent, case.currency, case.hours_per_year) == (1, "mol", "EUR", None)
    assert (case.aim.direction, case.aim.quantity) == ("least", "money.total")
    assert list(case.species) == ["benzene", "ethylene", "ethane", "ethylbenzene", "diethylbenzene"]


def test_species_and_fluid(read_lead: Read) -> None:
    case = read_lead()
    assert case.species["ethylbenzene"].gas_data == "C8H10,ethylbenz"
    lump = case.species["diethylbenzene"]
    assert lump.formula == "C10H14" and lump.gas_data is None
    assert (lump.enthalpy_of_formation, lump.entropy, lump.standard_pressure) == (-22e3, 435.0, 1e5)
    assert lump.heat_capacity and lump.heat_capacity.powers_of_T == (-37.4, 0.8671, -5.56e-4, 1.411e-7)
    assert (case.fluid.density, case.fluid.viscosity) == ("ideal gas", 1.7e-5)


def test_reactions_take_what_every_reaction_says(read_lead: Read) -> None:
    case = read_lead(
        ("    equation: benzene + eth", "    driven by: mole fraction\n    equation: benzene + eth"),
        ("4.2e-3 kmol/(kg h bar^2)", "4.2e-3 kmol/(kg h)"),
    )
    first, second, _ = case.reactions.values()
    assert (first.driven_by, second.driven_by) == ("mole fraction", "partial pressure")
    assert (
        first.rate_per == "catalyst mass" and first.orders is None and first.backward == "from Gibbs energies"
    )
    assert first.valid and first.valid.temperature == (623.15, 713.15)
    assert second.constant.is_ == Raw("2.2e-3 kmol/(kg h bar^2)")
    assert (second.constant.at, second.constant.activation_energy) == (673.15, 88e3)


def test_irreversible_equation_has_no_backward_rate(read_lead: Read) -> None:
    case = read_lead(("benzene + ethylene <=>", "benzene + ethylene =>"))
    assert [r.backward for r in case.reactions.values()] == [
        None,
        "from Gibbs energies",
        "from Gibbs energies",
    ]


def test_reversible_equation_takes_gibbs_energies_by_itself(read_lead: Read) -> None:
    case = read_lead(("    backward: from Gibbs energies\n", ""))
    assert {r.backward for r in case.reactions.values()} == {"from Gibbs energies"}


def test_constant_as_plain_text(read_lead: Read) -> None:
    old = "constant: {at: 400 degC, is: 4.2e-3 kmol/(kg h bar^2), activation energy: 66 kJ/mol}"
    constant = read_lead((old, "constant: 4.2e-3 kmol/(kg h bar^2)")).reactions["ethylation"].constant
    assert constant.is_.text == "4.2e-3 kmol/(kg h bar^2)"
    assert constant.at is None and constant.activation_energy is None


def test_orders_by_species(read_lead: Read) -> None:
    case = read_lead(
        ("    orders: as written\n", "    orders: {benzene: 0.5, ethylene: 1}\n"),
        ("4.2e-3 kmol/(kg h bar^2)", "4.2e-3 kmol/(kg h bar^1.5)"),
        ("2.2e-3 kmol/(kg h bar^2)", "2.2e-3 kmol/(kg h bar^1.5)"),
        ("1.0e-5 kmol/(kg h bar^2)", "1.0e-5 kmol/(kg h bar^1.5)"),
    )
    assert case.reactions["ethylation"].orders == {"benzene": 0.5, "ethylene": 1.0}


def test_feeds(read_lead: Read) -> None:
    feed = read_lead().feeds["ethylene"]
    assert feed.flow == Number(pytest.approx(268 / 3.6), kind="molar flow")
    assert feed.temperature == Number(318.15, kind="temperature")
    assert feed.composition == {"ethylene": pytest.approx(0.9985), "ethane": pytest.approx(0.0015)}
    assert sum(feed.composition.values()) == pytest.approx(1.0, abs=1e-15)


def test_a_composition_that_nearly_closes_is_scaled(read_lead: Read) -> None:
    composition = read_lead(("ethane: rest", "ethane: 0.14999 %")).feeds["ethylene"].composition
    assert sum(composition.values()) == pytest.approx(1.0, abs=1e-15)


def test_split_frees_all_but_the_rest(read_lead: Read) -> None:
    split = read_lead().feeds["ethylene"].split
    assert split and split.rest == "bed 4" and split.beds == ("bed 1", "bed 2", "bed 3", "bed 4")
    assert list(split.values) == ["bed 1", "bed 2", "bed 3"]
    total = pytest.approx(268 / 3.6)
    assert split.values["bed 1"] == Number(pytest.approx(67 / 3.6), 0.0, total, "molar flow")


SPLITS = [
    ("{bed 1: 67 kmol/h, bed 2: 67 kmol/h, bed 3: 67 kmol/h, bed 4: 67 kmol/h}", "all", "bed 4", [1, 2, 3]),
    ("{bed 1: 67 kmol/h, bed 2: 67 kmol/h, bed 3: 67 kmol/h, bed 4: 67 kmol/h}", None, None, []),
    (
        "{bed 1: rest, bed 2: 67 kmol/h, bed 3: 67 kmol/h, bed 4: 67 kmol/h}",
        "[bed 2, bed 4]",
        "bed 1",
        [2, 4],
    ),
    ("{bed 1: 25 %, bed 2: 25 %, bed 3: {now: 25 %, from: 10 %, to: 30 %}, bed 4: rest}", None, "bed 4", [3]),
    ("{bed 1: 25 %, bed 2: 25 %, bed 3: 25 %, bed 4: rest}", "bed 2", "bed 4", [2]),
]


@pytest.mark.parametrize(("now", "free", "rest", "freed"), SPLITS)
def test_splits(read_lead: Read, now: str, free: str | None, rest: str | None, freed: list[int]) -> None:
    changes = [("{bed 1: 67 kmol/h, bed 2: 67 kmol/h, bed 3: 67 kmol/h, bed 4: rest}", now)]
    changes += [("free: all", f"free: {free}")] if free else [("      free: all  ", "#")]
    split = read_lead(*changes).feeds["ethylene"].split
    assert split and split.rest == rest
    assert [bed for bed, entry in split.values.items() if entry.free] == [f"bed {n}" for n in freed]
    if "%" in now:
        assert split.kind == "fraction" and split.values["bed 1"].now == 0.25


def test_train(read_lead: Read) -> None:
    train = read_lead().train
    assert [s.owner for s in train] == [
        "entry",
        "bed 1",
        "gap 1",
        "bed 2",
        "gap 2",
        "bed 3",
        "gap 3",
        "bed 4",
        "effluent",
    ]
    assert [s.kind for s in train[:3]] == ["entry", "bed", "gap"] and train[3].index == 3
    take, heat, inject = train[0].steps
    assert (take.kind, take.feed, inject.kind, inject.feed) == ("take", "benzene", "inject", "ethylene")
    assert (heat.kind, heat.holds, heat.levels) == ("heat", "bed 1.inlet temperature", ("fired heater",))
    (cool,) = train[8].steps
    assert cool.to == Number(463.15, kind="temperature") and cool.levels == "every cooling level"
    assert cool.holds is None and cool.heat is None


def test_beds_take_what_every_bed_says(read_lead: Read) -> None:
    case = read_lead(("bed 2: {", "bed 2: {diameter: 2 m, catalyst activity: 0.9, state: bypassed, "))
    first, second = case.train[1].bed, case.train[3].bed
    assert first and second and (first.diameter, second.diameter) == (1.8, 2.0)
    assert first.catalyst == Number(2600.0, kind="mass") and first.equivalent_size == 0.0024
    assert (
        first.inlet_temperature == Number(657.15, 623.15, 683.15, "temperature")
        and first.inlet_temperature.free
    )
    assert (
        first.inlet_pressure
        and first.inlet_pressure.now == pytest.approx(1.94e6)
        and not first.inlet_pressure.free
    )
    assert (second.catalyst_activity, second.state, first.state) == (Number(0.9), "bypassed", "running")
    assert first.pressure_drop_factor == Number(1.0) and first.design_temperature == 753.15


def test_levels_prices_limits(read_lead: Read) -> None:
    case = read_lead()
    levels = case.heat_levels
    assert levels and levels.minimum_approach == 15.0 and list(levels.levels)[1] == "steam 28 bar"
    assert levels.levels["steam 28 bar"].cools_down_to == 503.15
    assert levels.levels["fired heater"].costs == Raw("34 EUR/MWh") and levels.levels["air"].earns is None
    assert case.prices["by-product"].of == "effluent.flow of diethylbenzene"
    cooler = case.limits["cooler"]
    assert (cooler.at_least, cooler.at_most, cooler.why) == (Raw("0 MW"), Raw("2.0 MW"), "")
    assert cooler.exceptions == {"gap 3": {"at_most": Raw("1.6 MW")}}
    assert case.limits["hot exit"].keep_away == Raw("0 K")


def test_what_the_example_does_not_show(read_lead: Read) -> None:
    case = read_lead(
        ("currency: EUR", "currency: EUR\nhours per year: 8300"),
        ("catalyst: 3.0 t", "catalyst: 4.7 m^3, pressure drop factor: {now: 1, from: 0.5, to: 2}"),
        ("flow: 965 kmol/h", "flow: {now: 75 t/h, from: 60 t/h, to: 80 t/h}"),
        ("costs: 4 EUR/MWh", "costs: 4 EUR/MWh, capacity: 5 MW"),
        ("at most: 46 K", "at most: 46 K, soft: 5 EUR/h per K"),
        ("at least: 30 kmol/h, at most: 82 kmol/h", "between: 30 kmol/h and 82 kmol/h"),
        ("costs: 62 EUR/kmol", "costs: 62 EUR/kmol}\n  charge: {of: train.catalyst, costs: 900 EUR/(t year)"),
        ("to: 190 degC, heat to: every cooling level", "heat removed: 3 MW, heat to: [air, steam 9 bar]"),
        ("heat from: fired heater", "heat from: unpriced"),
    )
    second = case.train[3].bed
    assert case.hours_per_year == 8300.0 and second and second.catalyst == Number(4.7, kind="volume")
    assert second.pressure_drop_factor.free and case.feeds["benzene"].flow.kind == "mass flow"
    assert case.heat_levels and case.heat_levels.levels["air"].capacity == 5e6
    assert case.limits["rise"].soft == Raw("5 EUR/h per K")
    assert case.limits["valve"].at_least == Raw("30 kmol/h") and case.limits["valve"].at_most == Raw(
        "82 kmol/h"
    )
    (cool,) = case.train[-1].steps
    assert cool.heat == Number(3e6, kind="power") and cool.levels == ("air", "steam 9 bar")
    assert case.train[0].steps[1].levels == "unpriced"


@pytest.mark.parametrize("empty", ["[]", ""])
def test_a_gap_may_be_empty(read_lead: Read, empty: str) -> None:
    cooler = "- cool: {holds: bed 2.inlet temperature, heat to: every cooling level}"
    steps = f"\n      - inject: ethylene\n      {cooler}"
    case = read_lead(
        (f"  - gap 1:{steps}", f"  - gap 1: {empty}"),
        ("bed 1: 67 kmol/h, bed 2: 67 kmol/h", "bed 1: 134 kmol/h"),
        (
            "{catalyst: 3.0 t, inlet temperature: {now: 384 degC, from: 350 degC, to: 410 degC}}",
            "{catalyst: 0 t}",
        ),
    )
    second = case.train[3].bed
    assert (
        case.train[2].steps == ()
        and second
        and second.inlet_temperature is None
        and second.catalyst.now == 0.0
    )


def test_data_file_is_looked_up_beside_the_case(tmp_path: Path, lead_text: str) -> None:
    (tmp_path / "mine.yaml").write_text("species: []")
    (tmp_path / "case.yaml").write_text(lead_text.replace("gas data: C6H6", 'gas data: "mine.yaml:C6H6"'))
    assert load(tmp_path / "case.yaml").species["benzene"].gas_data == f"{tmp_path.resolve()}/mine.yaml:C6H6"


def test_problems_point_into_the_file(read_lead: Read, lead_text: str) -> None:
    case = read_lead()
    lines = lead_text.splitlines()

    def under(*path: str | int, on_key: bool = False) -> str:
        problem = case.problem(path, "wrong", on_key=on_key)
        return lines[problem.line - 1][problem.column - 1 :]

    assert under("limits", "hot exit", "of").startswith("every bed.exit temperature, at most")
    assert under("limits", "hot exit", "of", on_key=True).startswith("of: every bed")
    assert under("limits", "hot exit").startswith("hot exit:")
    assert under("limits", "hot exit", "why", "deeper").startswith("xylenes")
    assert under("train", 3, "bed 2", "diameter").startswith("1.8 m")
    assert under(*case.train[2].path).startswith("gap 1:")
    assert under(*case.train[2].path, 1, "cool", "holds").startswith("bed 2.inlet temperature, heat to")
    assert under("reactions", "transalkylation", "rate per").startswith("catalyst mass")


def test_hash_is_of_what_the_case_says(read_lead: Read) -> None:
    same = read_lead(("# invented site", "# another remark"), ("feeds:\n", "feeds:\n\n"))
    assert same.hash == read_lead().hash and len(same.hash) == 64
    assert read_lead(("flow: 965 kmol/h", "flow: 966 kmol/h")).hash != same.hash
    assert read_lead(overrides=["bed 1.catalyst=2.7 t"]).hash == read_lead(("2.6 t", "2.7 t")).hash


def test_the_resolved_case_is_a_case(read_lead: Read) -> None:
    case = read_lead(overrides=["bed 1.catalyst=2.7 t"])
    again = load_data(yaml.safe_dump(case.resolved).encode(), LEAD)
    assert again.hash == case.hash and again.train == case.train and again.limits == case.limits
    assert case.resolved["train"][1]["bed 1"]["diameter"] == "1.8 m"


def test_a_case_is_frozen_and_can_be_sent_to_another_process(read_lead: Read) -> None:
    case = read_lead()
    with pytest.raises(ValueError, match="frozen"):
        case.name = "other"  # type: ignore[misc]
    again = pickle.loads(pickle.dumps(case))
    assert again == case and again.hash == case.hash
    assert str(again.problem(("fluid", "viscosity"), "x")) == str(case.problem(("fluid", "viscosity"), "x"))
