"""How an input is declared: what each declaration reads, refuses and says of itself."""

from __future__ import annotations

import pickle
from typing import Annotated

import pytest
from pydantic import ValidationError
from pydantic_core import PydanticCustomError

from engine.case import Case
from engine.exchangers.double_pipe import DoublePipe
from engine.exchangers.shell_and_tube import ShellAndTube
from engine.stated import (
    CaseError,
    Choice,
    Count,
    Figure,
    Input,
    Problem,
    Stated,
    Words,
    dotted,
    opposite,
    problems_of,
)

LENGTH = Stated("length", "Length", above=0.0, high=10.0, example="6 m")
FLOW = Stated(("mass_flow", "volume_flow"), "Flow", above=0.0)
FACTOR = Stated("dimensionless", "Factor", above=0.0, high=10.0)


def sentence(read, given, **how) -> str:
    with pytest.raises(PydanticCustomError) as caught:
        read(given, **how)
    return caught.value.message()


def test_a_figure_knows_what_was_typed():
    figure = FLOW.read("42.0 m3/h ± 3 %")
    assert figure == pytest.approx(42 / 3600, rel=1e-15)
    assert figure.text == "42.0 m3/h ± 3 %"
    assert figure.quantity == "volume_flow"
    assert figure.sd == pytest.approx(1.26 / 3600, rel=1e-15)
    assert figure.digit == pytest.approx(0.1 / 3600, rel=1e-15)


def test_a_figure_survives_pickling():
    figure = FLOW.read("42.0 m3/h ± 3 %")
    back = pickle.loads(pickle.dumps(figure))
    assert back == figure
    assert (back.text, back.sd, back.quantity, back.digit) == (figure.text, figure.sd, figure.quantity, figure.digit)


def test_numbers_of_the_program_are_si_and_numbers_of_a_file_give_no_unit():
    assert LENGTH.read(6.0) == 6.0
    assert LENGTH.read(6.0).quantity == "length"
    assert sentence(LENGTH.read, 6.0, file=True) == '6.0 gives no unit; write it as text, for example "6 m"'
    assert FACTOR.read(1.1, file=True) == 1.1
    assert FACTOR.read("1.1", file=True) == 1.1


def test_bounds_are_part_of_the_span_unless_they_are_open():
    assert LENGTH.read("10 m") == 10.0
    assert LENGTH.allowed() == "above 0 mm to 10000 mm"
    assert sentence(LENGTH.read, "0 m") == '"0 m" is out of bounds; allowed is above 0 mm to 10000 mm'
    assert sentence(LENGTH.read, float("nan")).endswith("is out of bounds; allowed is above 0 mm to 10000 mm")
    closed = Stated("length", "Length", low=0.0, high=1.0)
    assert closed.read("0 m") == 0.0
    assert closed.allowed() == "from 0 mm to 1000 mm"
    assert Stated("length", "Length", low=0.0).allowed() == "from 0 mm"


def test_counts_are_whole():
    count = Count("Legs", 1, 200)
    assert count.read(8) == 8
    assert sentence(count.read, 8.0) == "8.0 is not a whole number without a point; write 8"
    for given in (8.5, "8", True, None, [8], float("nan"), float("inf")):
        assert sentence(count.read, given).endswith("is not a whole number; allowed is 1 to 200")
    for given in (0, -1, 10**6, 10**400):
        assert sentence(count.read, given).endswith("is out of bounds; allowed is 1 to 200")


def test_choices_are_read_in_any_case_and_hint_at_what_may_be_meant():
    choice = Choice("Arrangement", ("counter", "co-current"))
    assert choice.read(" Counter ") == "counter"
    for given, meant in (("counter-current", "counter"), ("countr", "counter"), ("cocurrent", "co-current")):
        hint = f'"{given}" is not offered; allowed is counter, co-current; did you mean "{meant}"?'
        assert sentence(choice.read, given) == hint
    assert sentence(choice.read, "up") == '"up" is not offered; allowed is counter, co-current'
    assert sentence(choice.read, None) == "null is not offered; allowed is counter, co-current"


def test_words_are_plain_text_of_one_line_unless_lines_are_allowed():
    one, more = Words("Tag", 5), Words("Notes", 50, lines=True)
    assert one.read("Öl ½") == "Öl ½"
    assert more.read("a\nb\tc") == "a\nb\tc"
    assert sentence(one.read, "a\nb") == "holds control characters; allowed is plain text"
    assert sentence(one.read, "a\x9bb") == "holds control characters; allowed is plain text"
    assert sentence(one.read, "abcdef") == "is 6 characters long; allowed is up to 5"
    assert sentence(one.read, 40) == '40 is not text; write "40"'
    assert sentence(one.read, ["x"]) == '["x"] is not text'


def test_what_was_given_is_cut_where_it_is_long():
    said = sentence(LENGTH.read, {"a": "b" * 500})
    assert said.startswith('{"a": "bbb')
    assert "… (509 characters)" in said
    assert sentence(LENGTH.read, object()).startswith("something of the type object is not a figure")


class Part(Input):
    size: Annotated[float | None, LENGTH] = None
    count: Annotated[int | None, Count("Count", 0, 5)] = None
    kind: Annotated[str | None, Choice("Kind", ("a", "b"))] = None
    note: Annotated[str | None, Words("Note")] = None


def test_null_leaves_an_optional_key_unstated():
    assert Part.model_validate(dict.fromkeys(("size", "count", "kind", "note"))) == Part()


def test_inputs_are_frozen_and_know_their_declarations():
    part = Part(size="3 m")
    with pytest.raises(ValidationError):
        part.size = 4.0
    assert list(Part.declared()) == ["size", "count", "kind", "note"]
    assert Part.declared()["size"] is LENGTH
    assert list(part.problems()) == []


def test_errors_become_sentences_with_the_users_paths():
    with pytest.raises(ValidationError) as caught:
        Part.model_validate({"size": "3 kg", "cuont": 1})
    assert [str(problem) for problem in problems_of(caught.value, Part, {})] == [
        'size: "3 kg" is a mass; allowed is a length in mm, in, m, cm, ft, µm, …',
        'cuont: is not a known key; did you mean "count"?',
    ]


def test_paths_are_written_as_a_user_would_find_them():
    assert dotted(("fluid", "table", 1, "mu")) == "fluid.table[1].mu"
    assert str(Problem(path="T_in", says="is missing").under("inside")) == "inside.T_in: is missing"
    assert str(Problem(path="", says="is missing").under("inside")) == "inside: is missing"
    assert str(Problem(path="", says="the file is empty")) == "the file is empty"
    assert str(CaseError([Problem(path="a", says="x"), Problem(path="b", says="y")])) == "a: x\nb: y"


def test_each_side_has_the_other_opposite():
    assert opposite("inside") == "outside"
    assert opposite("outside") == "inside"


@pytest.mark.parametrize("model", [Case, DoublePipe, ShellAndTube])
def test_every_default_lies_within_its_bounds_and_every_assumption_is_explained(model):
    for name, declared in model.declared().items():
        default = model.model_fields[name].get_default()
        if model.model_fields[name].is_required() or default is None or isinstance(declared, Words):
            continue
        assert declared.read(default) == default
        assert declared.assumed or name in ("format",), name


@pytest.mark.parametrize("model", [Case, DoublePipe, ShellAndTube])
def test_every_example_can_be_read(model):
    examples = [declared for declared in model.declared().values() if isinstance(declared, Stated) and declared.example]
    assert all(isinstance(declared.read(declared.example, file=True), Figure) for declared in examples)


@pytest.mark.parametrize(
    "given", ["12 m3/h ± 300 %", "4 barg ± 5 bar", "60 degC ± 80 K", "0.0002 m2K/W ± 0.0003 m2K/W"]
)
def test_a_doubt_that_leaves_nothing_of_a_figure_is_refused(given):
    quantities = ("mass_flow", "volume_flow", "pressure_gauge", "temperature", "fouling_resistance")
    with pytest.raises(PydanticCustomError, match="leaves nothing"):
        Stated(quantities, "Anything").read(given)


@pytest.mark.parametrize(
    "given", ["12 m3/h ± 30 %", "0 barg ± 0.1 bar", "60 degC ± 2 K", "0.0003 m2K/W ± 0.0002 m2K/W"]
)
def test_a_doubt_of_usual_size_is_read(given):
    quantities = ("mass_flow", "volume_flow", "pressure_gauge", "temperature", "fouling_resistance")
    assert Stated(quantities, "Anything").read(given).sd > 0
