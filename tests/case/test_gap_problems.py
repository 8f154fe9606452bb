"""What is wrong with exchangers, recycles, removals and beds out of service is said at its place."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from reactorstage.case.reading import load_data, load_file
from reactorstage.errors import CaseProblems, Problem

LEAD = (Path(__file__).parent / "data" / "lead.yaml").read_text(encoding="utf-8")

COOL_1 = "      - cool: {holds: bed 2.inlet temperature, heat to: every cooling level}\n"
LAST = "      - cool: {to: 190 degC, heat to: every cooling level}\n"
EXCHANGER = "exchangers:\n  X: {effectiveness: 60 %}\n"
SIDES = {
    "      - heat: {holds: bed 1": "      - heat: {exchanger: X}\n      - heat: {holds: bed 1",
    LAST: f"{LAST}      - cool: {{exchanger: X}}\n",
}


def problems(changes: dict[str, str], behind: str = "") -> tuple[Problem, ...]:
    """Problems of the lead case with first occurrences of texts replaced and something added at its end."""
    text = LEAD
    for old, new in changes.items():
        assert old in text
        text = text.replace(old, new, 1)
    with pytest.raises(CaseProblems) as caught:
        load_data((text + behind).encode(), Path("lead.yaml"))
    return caught.value.problems


def with_step(step: str) -> dict[str, str]:
    """A step before the cooler of gap 1."""
    return {COOL_1: f"      - {step}\n{COOL_1}"}


ONE_PROBLEM = [
    # removal, pressure drop, draw
    (with_step("remove: {ethane: 101 %}"), "", "101 % of ethane is more than is there", "at most 100 %"),
    (with_step("remove: {ethan: 10 %}"), "", "there is no species 'ethan'", "did you mean ethane"),
    (
        with_step("remove: {ethane: 10 %, benzene: 3 kmol/h}"),
        "",
        "shares and flows are mixed",
        "two `remove`",
    ),
    (with_step("remove: {ethane: -1 %}"), "", "'-1 %' is below 0 %", ""),
    (with_step("remove: {}"), "", "nothing stands in remove", ""),
    (with_step("pressure drop: 0.1 bar(a)"), "", "a difference of pressures", ""),
    ({COOL_1: f"{COOL_1}      - remove: {{ethane: 10 %}}\n"}, "", "before this removal", "behind it hold"),
    (
        {"      - take: benzene\n": "      - take: benzene\n      - pressure drop: 0.1 bar\n"},
        "",
        "the pressure of entry follows",
        "inlet pressure of bed 1",
    ),
    (with_step("draw: Y"), "", "there is no recycle 'Y'", "under `recycles`"),
    (
        {**with_step("inject: Y"), LAST: f"{LAST}      - draw: Y\n      - draw: Y\n"},
        "recycles:\n  Y: {flow: 10 kmol/h}\n",
        "Y is drawn off a second time",
        "keep one",
    ),
    (
        with_step("inject: Y"),
        "recycles:\n  Y: {flow: 10 kmol/h}\n",
        "Y is drawn off nowhere",
        "add `- draw: Y`",
    ),
    (
        {LAST: f"{LAST}      - draw: Y\n"},
        "recycles:\n  Y: {flow: 10 kmol/h}\n",
        "Y is never injected",
        "to entry or to a gap",
    ),
    # exchangers
    (with_step("cool: {exchanger: X}"), "", "there is no exchanger 'X'", "under `exchangers`"),
    ({}, EXCHANGER, "no step uses X", "add `heat"),
    (with_step("cool: {exchanger: X}"), EXCHANGER, "X has one stream only", "add `heat: {exchanger: X}`"),
    ({**SIDES, **with_step("cool: {exchanger: X}")}, EXCHANGER, "a second `cool` step", "its own"),
    (SIDES, "exchangers:\n  X: {}\n", "nothing says how large X is", "`area` and `coefficient`"),
    (SIDES, "exchangers:\n  X: {area: 3 m^2}\n", "X has no coefficient", "go together"),
    (
        SIDES,
        "exchangers:\n  X: {area: 3 m^2, coefficient: 5 W/(m^2 K), effectiveness: 50 %}\n",
        "an effectiveness and an area",
        "one way",
    ),
    (SIDES, "exchangers:\n  X: {effectiveness: 160 %}\n", "'160 %' is above 100 %", ""),
    (
        SIDES,
        "exchangers:\n  X: {effectiveness: 60 %, cold bypass: 10 %, hot bypass: 10 %}\n",
        "both streams of X go round",
        "one bypass",
    ),
    (
        with_step("cool: {exchanger: X}"),
        "exchangers:\n  X: {effectiveness: 60 %, with feed: ethylen}\n",
        "there is no feed 'ethylen'",
        "did you mean ethylene",
    ),
    (SIDES, "exchangers:\n  X: {effectiveness: 60 %, with feed: ethylene}\n", "two streams of the train", ""),
    (
        {**SIDES, LAST: f"{LAST}      - cool: {{exchanger: X, heat to: air}}\n"},
        EXCHANGER,
        "goes to no level",
        "leave",
    ),
    # devices by area
    (
        with_step("cool: {area: 3 m^2, heat to: air}"),
        "",
        "an area stands here without a coeff",
        "coefficient",
    ),
    (
        with_step("cool: {area: 3 m^2, coefficient: 9 W/(m^2 K), heat to: every cooling level}"),
        "",
        "the temperature of one level",
        "name one",
    ),
    (
        with_step("cool: {heat removed: 1 MW, coefficient: 9 W/(m^2 K), heat to: air}"),
        "",
        "without an area",
        "add `area",
    ),
    # beds out of service
    (
        {"bed 2: {catalyst: 3.0 t,": "bed 2: {catalyst: 3.0 t, state: out of service,"},
        "",
        "nothing says what becomes of the injection before bed 2",
        "its injection: shut",
    ),
    (
        {"bed 2: {catalyst: 3.0 t,": "bed 2: {catalyst: 3.0 t, its injection: moved to bed 9,"},
        "",
        "the injection cannot move to bed 9",
        "bed 1, bed 3 or bed 4",
    ),
    (
        {"bed 2: {catalyst: 3.0 t,": "bed 2: {catalyst: 3.0 t, its injection: gone,"},
        "",
        "'gone' cannot",
        "shut",
    ),
    # cold shots
    ({"bed 2: 67 kmol/h": "bed 2: 267 kmol/h"}, "", "nothing is left for the rest", ""),
]


@pytest.mark.parametrize(("changes", "behind", "message", "advice"), ONE_PROBLEM)
def test_one_problem(changes: dict[str, str], behind: str, message: str, advice: str) -> None:
    found = problems(changes, behind)
    told = "\n".join(map(str, found))
    assert len({one.message for one in found}) == 1, told
    assert re.search(re.escape(message).replace(r"\ ", " "), found[0].message), told
    assert advice in found[0].hint, told
    assert found[0].line > 0 and found[0].column > 0


def test_shares_of_cold_shots_above_one() -> None:
    """Shares of the main feed that make more than the whole."""
    split = "now: {bed 1: 50 %, bed 2: 40 %, bed 3: 30 %}"
    old = "now: {bed 1: 67 kmol/h, bed 2: 67 kmol/h, bed 3: 67 kmol/h, bed 4: rest}"
    found = problems({old: split, "      free: all": "      # fixed"})
    assert any("sums to 120 %, not 100 %" in one.message for one in found)


VARIANT = "case: V\nformat: 1\nvariant of: lead.yaml\nchanges:\n"


@pytest.mark.parametrize(
    ("text", "message", "advice"),
    [
        (
            VARIANT.replace("lead.yaml", "lost.yaml") + "  bed 1.state: bypassed\n",
            "there is no file",
            "folder",
        ),
        (VARIANT + "  bed 9.state: bypassed\n", "nothing that can be set is called 'bed 9.state'", "nearest"),
        (VARIANT + "  gap 9.cooler state: bypassed\n", "nothing that can be set", "gap 1.cooler state"),
        (VARIANT + "  gap 1.cooler state: gone\n", "'gone' is not a choice here", "running or bypassed"),
        (VARIANT + "  feed ethylene.composition: {ethylene: 120 %}\n", "'120 %' is above 100 %", ""),
    ],
)
def test_variants(tmp_path: Path, text: str, message: str, advice: str) -> None:
    (tmp_path / "lead.yaml").write_text(LEAD, encoding="utf-8")
    (tmp_path / "variant.yaml").write_text(text, encoding="utf-8")
    with pytest.raises(CaseProblems) as caught:
        load_file(tmp_path / "variant.yaml")
    [found] = caught.value.problems
    assert message in found.message and advice in found.hint
    assert found.line > 0


def test_an_exchanger_with_everything_is_read() -> None:
    text = LEAD
    for old, new in SIDES.items():
        text = text.replace(old, new, 1)
    text += (
        "exchangers:\n  X: {area: 30 m^2, coefficient: 300 W/(m^2 K), fouling resistance: 2e-4 m^2 K/W, "
        "arrangement: parallel flow, minimum approach: 12 K, "
        "cold bypass: {now: 20 %, from: 0 %, to: 60 %}}\n"
    )
    case = load_data(
        text.encode(), Path("lead.yaml"), ["exchanger X.cold-bypass=30 %", "exchanger X.area=40 m^2"]
    )
    exchanger = case.exchangers["X"]
    assert exchanger.cold_bypass is not None and exchanger.cold_bypass.now == pytest.approx(0.3)
    assert exchanger.area is not None and exchanger.area.now == 40.0
