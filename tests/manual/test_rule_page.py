"""Every rule's page: whole, of 80 columns, with an example that the settings' reader takes."""

from __future__ import annotations

from pathlib import Path

import pytest

from pairrules.checks.rule import all_rules
from pairrules.manual.figure_page import figure_page, figures_page, model_page
from pairrules.manual.page import Page, Paragraph, Section, Terms, markdown, plain
from pairrules.manual.rule_page import explained, models_of, rule_page, tuning_example
from pairrules.manual.shipped_limits import shipped_limits
from pairrules.schemas.glossary import MODELS, glossary
from pairrules.settings.read_settings import read_settings
from pairrules.shipped import rules_folder

FORMS = {name: rule.form for name, rule in all_rules().items()}
HEADINGS = (
    "What it judges",
    "Why it matters",
    "Formula",
    "Where formula and limits come from",
    "What to do",
    "An example in numbers",
    "A finding of it",
    "What it rests on",
    "Limits that ship",
    "How to tune it",
)


@pytest.mark.parametrize("name", sorted(all_rules()))
def test_a_page_has_every_part_and_fits_a_terminal(name: str) -> None:
    page = rule_page(name)
    assert tuple(section.heading for section in page.sections if section.heading) == HEADINGS
    assert all(section.blocks for section in page.sections)
    example = tuning_example(name).splitlines()
    for line in plain((page,)).splitlines():
        assert len(line) <= 80 or line.removeprefix("  ") in example


@pytest.mark.parametrize("name", sorted(all_rules()))
def test_the_example_of_tuning_is_a_settings_file(name: str) -> None:
    settings = read_settings(Path("demo.yaml"), forms=FORMS, text=tuning_example(name))
    klass = settings.class_of("TIDE", ())
    assert klass is not None and klass.limits[name].source == "our own measurement"


@pytest.mark.parametrize("name", sorted(all_rules()))
def test_every_rule_rests_on_a_model(name: str) -> None:
    assert models_of(name)
    assert set(all_rules()[name].models) <= MODELS.keys()
    assert {one.model for one in explained()[name]} == {model.brief for model in models_of(name)}


def test_models_follow_from_the_figures_a_rule_names() -> None:
    assert [model.name for model in models_of("leg-length")] == ["routes"]
    assert [model.name for model in models_of("link-rejection")] == ["balance"]
    assert [model.name for model in models_of("termination")] == ["sections", "parts"]


def test_every_limit_of_every_set_is_there_with_its_source() -> None:
    base = read_settings(None, forms=FORMS).limits
    for name, limits in shipped_limits().items():
        sources = " ".join(text for one in limits if one.limit for text in one.limit.source.split())
        page = " ".join(plain((rule_page(name),)).split())
        for one in limits:
            assert f"{one.of}: " in page
        assert all(source in page for source in sources.split())
    assert base.keys() <= shipped_limits().keys()
    sets = {one.of for limits in shipped_limits().values() for one in limits}
    assert sets == {file.stem for file in rules_folder().glob("*.yaml")}


def test_a_rule_that_a_set_switches_off_says_so() -> None:
    page = plain((rule_page("gap-band"),))
    assert "  base: spread 20 %, for 5 mm; severity note\n" in page
    assert "  can: off\n" in page


def test_a_time_or_a_share_is_offered_where_the_rule_takes_it() -> None:
    page = " ".join(plain((rule_page("stub-length"),)).split())
    assert "most: length, such as 0.5 mm; or a time, such as 20 ps; or a share, such as 5 % of rise_time" in page
    assert "or a time" not in plain((rule_page("layer-match"),))


@pytest.mark.parametrize("name", sorted(glossary()))
def test_every_figure_has_a_page_with_its_model(name: str) -> None:
    entry = glossary()[name]
    page = " ".join(plain((figure_page(name),)).split())
    assert page.startswith(f"{name} {entry.definition}")
    assert f"Model: {entry.model}" in page and " valid: " in page and " leaves out: " in page and " assumes: " in page


def test_figures_and_models_name_one_another() -> None:
    figures = " ".join(plain((figures_page(),)).split())
    assert "gap_min_mm: Least distance from track edge to track edge" in figures and "[mm] Model: spacing." in figures
    page = " ".join(plain((model_page("loop-area"),)).split())
    assert page.endswith("What rests on it figures: loop_area_mm2, net_loop_area_mm2 rules: loop-area")


def test_markdown_escapes_what_it_would_take_for_markup() -> None:
    page = Page(
        name="a-rule",
        sections=(
            Section(heading="", blocks=(Paragraph(text="|a_b| < `c_d` [mm] * 2"),)),
            Section(heading="Terms", blocks=(Terms(rows=(("most", ("5 mm", "from: us.")),)),)),
        ),
    )
    assert markdown("Title", "Opening.", (page,)) == (
        "# Title\n\nOpening.\n\n* [a-rule](#a-rule)\n\n## a-rule\n\n\\|a\\_b\\| \\< `c_d` \\[mm\\] \\* 2\n\n"
        "### Terms\n\n* **most**: 5 mm. from: us.\n"
    )
