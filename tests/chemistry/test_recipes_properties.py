"""Properties of the recipe notation: round trips, order, and nothing but RecipeError."""

from collections.abc import Callable

from hypothesis import given, settings
from hypothesis import strategies as st

from campaign.chemistry.recipes import (
    additive_key_of,
    parse_recipe,
    salt_key_of,
    solvent_key_of,
)
from campaign.chemistry.species import all_species
from campaign.chemistry.spelling import MAX_LENGTH
from campaign.errors import RecipeError

SALTS = [s.name for s in all_species() if s.cation]
SOLVENTS = [s.name for s in all_species() if "solvent" in s.classes]
ADDITIVES = [s.name for s in all_species() if s.classes == ("additive",)]
AMOUNTS = st.floats(1e-6, 90.0).map(lambda x: f"{x:.15g}") | st.integers(1, 9).map(str)
PIECES = st.sampled_from(
    ["1", "0.5", "0,5", "3:7", "(1:1 v/v)", "(", ")", " ", "M", " mol/L ", " m ", "wt%", " vol.% ",
     "%", "NaPF6", "LiPF₆", "EC", "DMC", "PC", "FEC", "water", "2-MeTHF", "1,3-dioxolane",
     "Mg(TFSI)2", "Foo", "bar baz", "x(y)z", ":", "/", "+", "-", ",", ";", "=", " in ", " with ",
     " and ", "v:v", "mol", "(aq)", "·7H2O", ".", "^", "⁻¹", "e5", "nan", "inf", "\t", "é", "İ",
     "[", "]", "'", "½", "Ａ", "|", "a mixture of "]
)  # fmt: skip


@st.composite
def recipes(draw: st.DrawFn) -> tuple[list[str], list[str], list[str], list[str], str]:
    """Return salts with amounts, solvents, their parts, additives with amounts, and a basis."""
    salts = draw(st.lists(st.sampled_from(SALTS), min_size=1, max_size=3, unique=True))
    solvents = draw(st.lists(st.sampled_from(SOLVENTS), min_size=1, max_size=4, unique=True))
    extra = draw(st.lists(st.sampled_from(ADDITIVES), max_size=3, unique=True))
    unit = draw(st.sampled_from(["M", "mol/kg", "mol L-1"]))
    amounts = draw(st.lists(st.integers(1, 3000), min_size=3, max_size=3))
    written = [f"{a / 1000} {unit} {s}" for a, s in zip(amounts, salts, strict=False)]
    parts = draw(st.lists(AMOUNTS, min_size=len(solvents), max_size=len(solvents)))
    percent = st.sampled_from(["wt%", "vol%"])
    more = [f"{draw(st.integers(1, 30))} {draw(percent)} {name}" for name in extra]
    return written, solvents, parts, more, draw(st.sampled_from(["v/v", "w/w", "mol/mol"]))


def write(
    salts: list[str], solvents: list[str], parts: list[str], more: list[str], basis: str
) -> str:
    ratio = f" ({':'.join(parts)} {basis})" if len(solvents) > 1 else ""
    return " + ".join([f"{' + '.join(salts)} in {':'.join(solvents)}{ratio}", *more])


@given(recipes())
@settings(max_examples=300)
def test_a_key_reads_back_to_the_same_recipe(
    drawn: tuple[list[str], list[str], list[str], list[str], str],
) -> None:
    recipe = parse_recipe(write(*drawn))
    again = parse_recipe(recipe.key)
    assert again == recipe
    assert again.key == recipe.key
    assert abs(sum(part.amount for part in recipe.of_role("solvent")) - 1.0) < 1e-12
    assert salt_key_of(recipe.salt_key) == recipe.salt_key
    assert solvent_key_of(recipe.solvent_key) == recipe.solvent_key
    assert additive_key_of(recipe.additive_key) == recipe.additive_key


@given(recipes(), st.randoms(use_true_random=False))
@settings(max_examples=200)
def test_the_order_of_writing_does_not_matter(
    drawn: tuple[list[str], list[str], list[str], list[str], str], random: object
) -> None:
    salts, solvents, parts, more, basis = drawn
    pairs = list(zip(solvents, parts, strict=True))
    shuffled_salts, shuffled_more = list(salts), list(more)
    for items in (pairs, shuffled_salts, shuffled_more):
        random.shuffle(items)  # type: ignore[attr-defined]
    names, numbers = [name for name, _ in pairs], [part for _, part in pairs]
    other = parse_recipe(write(shuffled_salts, names, numbers, shuffled_more, basis))
    straight = parse_recipe(write(*drawn))
    assert other.salt_key == straight.salt_key
    assert other.additive_key == straight.additive_key
    assert other == straight


def reads_or_refuses(text: str) -> None:
    try:
        recipe = parse_recipe(text)
    except RecipeError as error:
        assert 0 <= error.position <= len(text)
        assert error.message and error.expected
        return
    assert parse_recipe(recipe.key) == recipe
    assert len(recipe.key) <= MAX_LENGTH
    assert all(part.amount > 0 for part in recipe.components)


@given(st.text(max_size=60) | st.text(alphabet="1M NaPF6inEC:DMC(/)+wt%v,.-·⁻¹₆", max_size=60))
@settings(max_examples=500)
def test_any_text_is_read_or_refused(text: str) -> None:
    reads_or_refuses(text)


@given(st.lists(PIECES, max_size=14).map("".join))
@settings(max_examples=500)
def test_any_pieces_are_read_or_refused(text: str) -> None:
    reads_or_refuses(text)


@given(
    st.sampled_from([salt_key_of, solvent_key_of, additive_key_of]),
    st.lists(PIECES, max_size=8).map("".join),
)
@settings(max_examples=500)
def test_any_filter_is_read_or_refused(read: Callable[[str], str], text: str) -> None:
    try:
        key = read(text)
    except RecipeError as error:
        assert 0 <= error.position <= len(text)
        return
    assert read(key) == key


@given(st.integers(5, 200), PIECES, PIECES)
@settings(max_examples=300)
def test_long_repetitions_are_read_or_refused(count: int, a: str, b: str) -> None:
    """What is read is bounded by MAX_LENGTH, so no repetition can take long."""
    reads_or_refuses("1 M NaPF6 in " + (a + b) * count)


def test_the_bound_on_length_holds_before_anything_is_read() -> None:
    text = "1 M NaPF6 in " + "x" * 10_000_000
    try:
        parse_recipe(text)
    except RecipeError as error:
        assert error.position == MAX_LENGTH
    else:
        raise AssertionError("a text of ten million characters was read")
