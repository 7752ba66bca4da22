"""How what plugins offer is found by name, and what is said when it is not."""

from __future__ import annotations

import pytest

from lostwork.errors import PluginClash, PluginNotFound
from lostwork.plugins import Plugins


@pytest.fixture
def two_of_a_name(site, plugin_offering):
    """Two distributions that both offer ``gas``; one offers ``steam`` too."""
    site.module("left_plugin", plugin_offering("gas", "steam"))
    site.module("right_plugin", plugin_offering("gas"))
    site.distribution("left-gases", {"left": "left_plugin"})
    site.distribution("right-gases", {"right": "right_plugin"})
    return Plugins(site.entry_points())


def test_a_name_that_two_plugins_offer_is_refused_and_the_choices_are_named(two_of_a_name):
    with pytest.raises(PluginClash) as clash:
        two_of_a_name.backend("gas")
    assert clash.value.choices == ("left-gases:gas", "right-gases:gas")
    assert two_of_a_name.failures == ()


@pytest.mark.parametrize("name", ["right-gases:gas", "Right_Gases:gas"])
def test_the_distribution_chooses_between_two_of_a_name(two_of_a_name, name):
    assert two_of_a_name.backend(name).plugin == "right"


def test_a_name_offered_once_is_found_with_and_without_its_distribution(two_of_a_name):
    assert two_of_a_name.backend("steam") is two_of_a_name.backend("left-gases:steam")


def test_a_catalogue_iterates_over_one_name_for_each_thing(two_of_a_name):
    backends = two_of_a_name.backends
    assert list(backends) == ["left-gases:gas", "right-gases:gas", "steam"]
    assert len(backends) == 3
    assert backends["left-gases:steam"] is backends["steam"]
    assert "gas" not in backends
    assert backends.get("gas") is None
    assert len({id(descriptor) for descriptor in backends.values()}) == 3


def test_a_catalogue_cannot_be_written_to(two_of_a_name):
    with pytest.raises(TypeError):
        two_of_a_name.backends["gas"] = None
    with pytest.raises(AttributeError):
        two_of_a_name.backends = {}


def test_two_plugins_of_one_distribution_are_told_apart_by_the_plugin(site, plugin_offering):
    site.module("one_plugin", plugin_offering("gas"))
    site.module("two_plugin", plugin_offering("gas"))
    site.distribution("both", {"one": "one_plugin", "two": "two_plugin"})
    read = Plugins(site.entry_points())
    for name in ("gas", "both:gas"):
        with pytest.raises(PluginClash) as clash:
            read.backend(name)
        assert clash.value.choices == ("both:one:gas", "both:two:gas")
    assert read.backend("both:two:gas").plugin == "two"


def test_an_unknown_name_lists_what_is_installed(two_of_a_name):
    with pytest.raises(PluginNotFound) as refused:
        two_of_a_name.backend("stem")
    assert refused.value.installed == ("left-gases:gas", "right-gases:gas", "steam")
    assert "steam" in str(refused.value)
    assert refused.value.__cause__ is None


@pytest.mark.parametrize("kind", ["process", "exporter", "check"])
def test_kinds_have_names_of_their_own(two_of_a_name, kind):
    with pytest.raises(PluginNotFound) as refused:
        getattr(two_of_a_name, kind)("steam")
    assert (refused.value.kind, refused.value.installed) == (kind, ())


@pytest.mark.parametrize("name", ["real_gas", "real-gas", "real-gases:real-gas"])
def test_asking_for_what_a_failed_plugin_would_offer_chains_its_failure(site, name):
    site.module("real_plugin", "raise OSError('no table')")
    site.distribution("real-gases", {"real_gas": "real_plugin"})
    read = Plugins(site.entry_points())
    with pytest.raises(PluginNotFound) as refused:
        read.backend(name)
    assert refused.value.__cause__ is read.failures[0].error
    assert isinstance(refused.value.__cause__.__cause__, OSError)


@pytest.mark.parametrize("name", ["methane", "other-gases:real_gas"])
def test_a_plugin_that_failed_is_named_where_it_might_have_offered_what_is_asked(site, name):
    site.module("real_plugin", "raise OSError('no table')")
    site.distribution("real-gases", {"real_gas": "real_plugin"})
    with pytest.raises(PluginNotFound, match=r"real_gas \(failed at import\)") as refused:
        Plugins(site.entry_points()).backend(name)
    assert refused.value.__cause__ is None
