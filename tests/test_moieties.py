"""Units against the moieties that the authors of the files state: the table of agreement.

Source: `_chemical_formula_moiety` of the entries of the Crystallography Open Database in the corpus. Every difference
is listed with its reason in tests/reference/moieties.toml.
"""

from functools import cache
from pathlib import Path

import gemmi
import pytest
from literature import reference
from moieties import agree, found, stated, words

from sitesym.reading import read
from sitesym.units import units_of

CORPUS = Path(__file__).resolve().parents[2] / "shared" / "corpus" / "cif"
KNOWN = reference("moieties.toml")

pytestmark = pytest.mark.skipif(not CORPUS.exists(), reason="the corpus of CIF files is not at hand")


def moiety(path: Path) -> str | None:
    """What the file states, None if nothing; broken files state nothing."""
    try:
        document = gemmi.cif.read(str(path))
    except (ValueError, RuntimeError):
        return None
    values = [block.find_value("_chemical_formula_moiety") for block in document]
    return next((gemmi.cif.as_string(value) for value in values if value not in (None, "?", ".")), None)


@cache
def table() -> dict[str, tuple[str, str, bool]]:
    """Code of the file -> moieties stated, units found, whether they agree."""
    rows = {}
    for path in sorted(CORPUS.glob("*.cif")):
        if (text := moiety(path)) is None:
            continue
        own, nets = found(units_of(read(path)))
        try:
            parts = stated(text)
        except ValueError:
            rows[path.stem] = (" ".join(text.split()), words(own), False)
            continue
        rows[path.stem] = (words(parts), words(own), agree(parts, own, nets))
    return rows


def test_units_agree_with_the_stated_moieties_but_for_the_known_differences():
    """Prints the table (pytest -s)."""
    rows = table()
    for code, (parts, own, same) in rows.items():
        note = "agree" if same else KNOWN.get(code, {}).get("kind", "NEW")
        print(f"{code}  {note:<10}  {parts:<48.48}  {own:.60}")
    kinds = [entry["kind"] for entry in KNOWN.values()]
    counts = ", ".join(f"{kind} {kinds.count(kind)}" for kind in dict.fromkeys(kinds))
    print(f"{sum(same for *_, same in rows.values())} of {len(rows)} agree; of the others: {counts}")
    assert {code for code, (*_, same) in rows.items() if not same} == set(KNOWN)


def test_only_two_differences_are_due_to_the_rule():
    assert [code for code, entry in KNOWN.items() if entry["kind"] == "rule"] == ["2003136", "2019572"]


def test_the_users_word_gives_the_stated_complex_where_the_rule_does_not():
    from sitesym.bonding import BondRules

    path = CORPUS / "2019572.cif"
    own, nets = found(units_of(read(path), BondRules(add=(("Na", "O"),))))
    assert agree(stated(moiety(path)), own, nets)


@pytest.mark.parametrize("code", KNOWN)
def test_every_difference_has_a_kind_and_a_reason(code):
    assert KNOWN[code]["kind"] in ("whole", "file", "unreadable", "rule")
    assert KNOWN[code]["reason"]
