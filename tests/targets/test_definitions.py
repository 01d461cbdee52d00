"""The shipped definitions: their design inequalities and how faults in a definition are told.

Common practice, no source: no single fact, and no group without its corroboration, may carry a verdict.
"""

import pytest

from registry.petrology.analytes import CHOSEN_COLUMNS
from registry.petrology.catalogue import QUANTITIES
from registry.pipeline import FLAG_CONTEXT, NUMBER_CONTEXT, TEXT_CONTEXT
from registry.targets.definition import (
    TARGET_CODES,
    DefinitionError,
    definition_text,
    faults_of,
    load_definition,
    load_definitions,
    parse_definition,
)
from registry.targets.quantities import POWERS, RULES, known_of

KNOWN = {quantity.name for quantity in QUANTITIES}.union(
    CHOSEN_COLUMNS, POWERS, RULES, NUMBER_CONTEXT, TEXT_CONTEXT, FLAG_CONTEXT
)

#: A precondition on another criterion's inputs, or on the rock being what the model was made for.
DERIVED_FROM_OTHERS = {"zircon_model_applies"}


def weight_of(definition, groups=(), codes=()):
    return sum(c.weight for c in definition.criteria if c.group in groups or c.code in codes) / 100


def test_load_definitions_gives_the_seven_targets_in_order():
    assert tuple(load_definitions()) == TARGET_CODES


@pytest.mark.parametrize("code", TARGET_CODES)
def test_shipped_definition_reads_only_quantities_that_exist(code):
    assert faults_of(load_definition(code), KNOWN) == []


@pytest.mark.parametrize("code", TARGET_CODES)
def test_shipped_definition_names_a_supply_for_every_input_it_may_lack(code):
    definition = load_definition(code)
    known = known_of({}, 1)
    tests = [test for criterion in definition.criteria for test in (criterion.test, *criterion.only_if)]
    names = {name for test in tests for name in known.inputs(test.quantity)}
    assert names - DERIVED_FROM_OTHERS <= set(definition.supply)


@pytest.mark.parametrize("code", TARGET_CODES)
def test_shipped_definition_cites_a_source_and_ends_with_the_usual_caution(code):
    definition = load_definition(code)
    assert all(criterion.source.strip() and criterion.label.strip() for criterion in definition.criteria)
    assert any("screening aid" in caution for caution in definition.cautions)


@pytest.mark.parametrize("code", TARGET_CODES)
def test_shipped_definition_single_group_never_reaches_favourable(code):
    definition = load_definition(code)
    groups = {criterion.group for criterion in definition.criteria}
    assert max(weight_of(definition, {group}) for group in groups) < definition.favourable


def test_porphyry_copper_plagioclase_generic_and_vanadium_stay_below_favourable():
    porphyry = load_definition("porphyry_copper")
    assert weight_of(porphyry, "ABE") < porphyry.favourable
    assert weight_of(porphyry, "CE") < porphyry.possible


def test_tungsten_without_tungsten_stays_below_favourable():
    tungsten = load_definition("tungsten")
    assert 1 - weight_of(tungsten, codes=["tungsten"]) < tungsten.favourable


def test_nickel_copper_without_nickel_and_sulphur_stays_below_favourable():
    nickel = load_definition("nickel_copper")
    assert 1 - weight_of(nickel, codes=["nickel_above_silicate", "sulphur"]) < nickel.favourable


def test_rare_metal_single_element_group_stays_below_possible():
    rare_metal = load_definition("rare_metal")
    groups = {criterion.group for criterion in rare_metal.criteria}
    assert max(weight_of(rare_metal, {group}) for group in groups) < rare_metal.possible


def test_magmatic_heat_cannot_pass_without_theta():
    heat = load_definition("magmatic_heat")
    assert [gate.test.quantity for gate in heat.gates] == ["theta_centre"]


def test_parse_definition_weights_off_by_one_says_so():
    text = definition_text("tin").replace("weight = 12", "weight = 13")
    with pytest.raises(DefinitionError, match="the weights sum to 101, expected 100"):
        parse_definition(text, "tin")


def test_parse_definition_tells_every_fault_at_once():
    text = definition_text("tin").replace('test = ">= 5"', 'test = "over 5"', 1).replace("favourable = 0.65", "")
    with pytest.raises(DefinitionError, match=r"(?s)'favourable' is missing.*test 'over 5' on rb_sr is not understood"):
        parse_definition(text, "tin")


def test_parse_definition_unknown_quantity_is_named():
    text = definition_text("tin").replace('quantity = "nb_ta"', 'quantity = "nb_over_ta"')
    with pytest.raises(DefinitionError, match="the quantity 'nb_over_ta' does not exist"):
        parse_definition(text, "tin", KNOWN)


def test_parse_definition_misspelt_key_is_named_with_the_known_ones():
    text = definition_text("tin").replace('group = "A"', 'grupo = "A"', 1)
    with pytest.raises(DefinitionError, match="'grupo' is not known; a criterion may hold"):
        parse_definition(text, "tin")


def test_parse_definition_possible_above_favourable_is_refused():
    text = definition_text("tin").replace("possible = 0.40", "possible = 0.70")
    with pytest.raises(DefinitionError, match="expected 0 < possible < favourable <= 1"):
        parse_definition(text, "tin")


def test_parse_definition_code_twice_is_refused():
    text = definition_text("tin").replace('code = "rb_over_sr_lower"', 'code = "rb_over_sr"')
    with pytest.raises(DefinitionError, match="the code 'rb_over_sr' stands twice"):
        parse_definition(text, "tin")


def test_parse_definition_broken_toml_says_where():
    with pytest.raises(DefinitionError, match=r"tin is not TOML: .*line 2"):
        parse_definition("version = 1\ncode = tin", "tin")


def test_load_definition_unknown_code_lists_the_targets():
    with pytest.raises(DefinitionError, match="there is no target 'gold'; the targets are porphyry_copper"):
        load_definition("gold")
