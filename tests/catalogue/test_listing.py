"""The catalogue as text."""

from modgen.catalogue import describe, load_catalogue

CATALOGUE = load_catalogue()


def test_without_a_pattern_one_row_a_family():
    lines = describe(CATALOGUE).splitlines()
    assert lines[0].split() == ["family", "kind", "parts", "mount", "from", "to", "description"]
    assert [line.split()[0] for line in lines[1:-2]] == sorted(
        CATALOGUE.families, key=lambda f: (next(p.kind for p in CATALOGUE.parts.values() if p.family == f), f)
    )
    assert lines[-1] == f"{len(CATALOGUE.parts)} parts; name a key, kind, family or word to see them"


def test_one_part():
    assert describe(CATALOGUE, "FILM-PET-5MM 63v-1u0") == (
        "key                   value      ratings         height   price  evidence  description\n"
        "film-pet-5mm-63v-1u0  1 µF 10 %  63 V, film-pet  10.0 mm  0.23*  D4 P2 M2  "
        "Capacitor, polyester film, box, 5 mm pitch\n"
        "\n"
        "1 part\n"
        "evidence: figures from D a published document, P common practice, M memory; "
        "* invented price, not a quotation"
    )


def test_by_kind_and_by_type():
    keys = [line.split()[0] for line in describe(CATALOGUE, "jack").splitlines()[1:-3]]
    assert keys == ["jack-35-switched"]
    rows = describe(CATALOGUE, "lm358 dip").splitlines()
    assert [row.split()[0] for row in rows[1:3]] == ["lm324-dip14", "lm358-dip8"]
    assert "3 V to 30 V, bipolar, 1 mA each, offset 7 mV" in rows[2]
    assert "2 parts" in rows
    assert any(row.startswith("note on lm358: reaches 20 mV") for row in rows)


def test_a_real_price_has_no_mark(tmp_path):
    path = tmp_path / "mine.yaml"
    path.write_text(
        "families:\n  jack-35-switched:\n    like: jack-35-switched\n    source: practice\n"
        "    parts: [{key: jack-35-switched, prices: {1: 0.61}}]\n"
    )
    assert " 0.55* " in describe(CATALOGUE, "jack-35")
    assert " 0.61 " in describe(load_catalogue([path]), "jack-35")


def test_nothing_found():
    assert describe(CATALOGUE, "flux") == ("no part has 'flux' in its key, kind, family, mount, type or description")
