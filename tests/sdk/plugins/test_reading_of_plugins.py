"""How plugins are read, and what is left of one that fails."""

from __future__ import annotations

import sys
from importlib.metadata import EntryPoint

import pytest

from lostwork.errors import (
    ApiVersionMismatch,
    DescriptorError,
    LostworkError,
    PluginClash,
    PluginFailed,
    PluginNotFound,
)
from lostwork.plugins import PLUGIN_API, BackendDescriptor, Failure, Plugins, hookimpl

DESCRIBED = 'BackendDescriptor("acme", "A gas.", "gas:Gas", api_version=1)'


@pytest.fixture
def sound(site, plugin_offering):
    """Install one sound plugin."""
    site.module("sound_plugin", plugin_offering("sound"))
    site.distribution("sound-gases", {"sound": "sound_plugin"})
    return site


def only_failure(read: Plugins) -> Failure:
    """Return the one failure, having checked that the sound plugin works all the same."""
    assert read.backend("sound").name == "sound"
    (failure,) = read.failures
    assert isinstance(failure.error, LostworkError)
    assert failure.fix
    return failure


def read_with(sound, source: str, **options) -> Plugins:
    sound.module("faulty_plugin", source)
    sound.distribution("a-faulty-one", {"faulty": "faulty_plugin"})
    return Plugins(sound.entry_points(), **options)


def faulty_hook(source: str) -> str:
    return f"from lostwork import BackendDescriptor, hookimpl\n{source}"


def test_a_sound_plugin_is_read_and_its_descriptors_say_where_they_come_from(sound):
    read = Plugins(sound.entry_points())
    assert read.failures == ()
    descriptor = read.backend("sound")
    assert (descriptor.distribution, descriptor.plugin) == ("sound-gases", "sound")
    (installed,) = read.installed
    assert (installed.plugin, installed.distribution, installed.version) == (
        "sound",
        "sound-gases",
        "1.2",
    )
    assert installed.descriptors == (descriptor,)
    assert installed.failed is None


@pytest.mark.parametrize(
    ("source", "kind"),
    [
        ("def broken(:", SyntaxError),
        ("import a_library_that_is_absent", ModuleNotFoundError),
        ("raise RuntimeError('no licence')", RuntimeError),
        ("import sys; sys.exit(3)", SystemExit),
        ("from lostwork import no_such_name", ImportError),
    ],
)
def test_a_plugin_that_cannot_be_imported_leaves_the_others_standing(sound, source, kind):
    read = read_with(sound, source)
    failure = only_failure(read)
    assert (failure.plugin, failure.distribution, failure.version, failure.stage) == (
        "faulty",
        "a-faulty-one",
        "1.2",
        "import",
    )
    assert isinstance(failure.error, PluginFailed)
    assert isinstance(failure.error.__cause__, kind)
    (installed,) = [one for one in read.installed if one.plugin == "faulty"]
    assert kind.__name__ in installed.failed


@pytest.mark.parametrize(
    "source", ["raise KeyboardInterrupt", "def f(): pass\nraise GeneratorExit"]
)
def test_an_interrupt_during_an_import_is_not_taken_for_a_failure_of_the_plugin(sound, source):
    with pytest.raises((KeyboardInterrupt, GeneratorExit)):
        read_with(sound, source)


def test_an_interrupt_in_a_hook_is_not_taken_for_a_failure_of_the_plugin(sound):
    source = "@hookimpl\ndef lostwork_backends():\n    raise KeyboardInterrupt"
    with pytest.raises(KeyboardInterrupt):
        read_with(sound, faulty_hook(source))


def test_an_absent_library_is_installed_with_the_smallest_extra_that_asks_for_it(sound):
    sound.module("thirsty_plugin", "import Dry_Library.part")
    requires = (
        "dry-library>=2; extra == 'all'",
        "other; extra == 'all'",
        "dry-library>=2 ; python_version > '3' and extra == \"wet\"",
    )
    sound.distribution("thirsty", {"thirsty": "thirsty_plugin"}, requires=requires)
    failure = only_failure(Plugins(sound.entry_points()))
    assert failure.fix == 'Install it with: pip install "thirsty[wet]"'
    assert failure.fix in str(failure.error)


def test_an_absent_library_that_no_extra_asks_for_is_installed_by_itself(sound):
    failure = only_failure(read_with(sound, "import a_library_that_is_absent"))
    assert failure.fix == "Install it with: pip install a_library_that_is_absent"


def test_an_absent_module_of_the_plugin_itself_is_not_sought_on_an_index(sound):
    sound.distribution("hollow", {"hollow": "hollow_plugin"})
    failure = only_failure(Plugins(sound.entry_points()))
    assert "pip install hollow_plugin" not in failure.fix
    assert "pip install --upgrade hollow" in failure.fix


@pytest.mark.parametrize(
    ("hook", "expected"),
    [
        ("@hookimpl\ndef lostwork_procesess(): return []", "Perhaps lostwork_processes is meant"),
        ("def lostwork_procesess(): return []", "Perhaps lostwork_processes is meant"),
        ("@hookimpl\ndef lostwork_backend(): return []", "Perhaps lostwork_backends is meant"),
        ("@hookimpl\ndef something_else(): return []", "The hooks are"),
        ("def lostwork_qqq(): return []", "The hooks are"),
        ("def lostwork_backends(): return []", "@hookimpl"),
        ("@hookimpl\ndef lostwork_backends(api=1): return []", "argument api a default"),
        ("@hookimpl\ndef lostwork_backends(*, api=1): return []", "argument api a default"),
        ("@hookimpl\ndef lostwork_backends(models): return []", "models"),
        ("@hookimpl(wrapper=True)\ndef lostwork_backends(): return (yield)", "wraps a hook"),
        ("@hookimpl(hookwrapper=True)\ndef lostwork_backends(): yield", "wraps a hook"),
        ("", "no hook"),
    ],
)
def test_a_plugin_whose_hooks_are_wrong_is_taken_out_whole(sound, hook, expected):
    sound_hook = "@hookimpl\ndef lostwork_checks(): return []\n" if hook else ""
    read = read_with(sound, faulty_hook(sound_hook + hook))
    failure = only_failure(read)
    assert failure.stage == "register"
    assert expected in str(failure.error)
    assert [one.plugin for one in read.installed if one.descriptors] == ["sound"]


def test_a_half_registered_plugin_offers_nothing(sound):
    source = f"@hookimpl\ndef lostwork_backends(): return [{DESCRIBED}]\n"
    read = read_with(sound, faulty_hook(source + "@hookimpl\ndef lostwork_check(): return []"))
    assert only_failure(read).stage == "register"
    assert list(read.backends) == ["sound"]


def test_an_entry_point_that_leads_to_none_is_a_failure(sound):
    sound.module("empty_plugin", "nothing = None")
    sound.distribution("empty", {"empty": "empty_plugin:nothing"})
    failure = only_failure(Plugins(sound.entry_points()))
    assert failure.stage == "register"
    assert "None" in str(failure.error)


def test_a_hook_of_a_later_version_may_be_marked_optional(sound):
    source = (
        "@hookimpl(optionalhook=True)\ndef later_hook(): return []\n"
        f"@hookimpl\ndef lostwork_backends(): return [{DESCRIBED}]"
    )
    read = read_with(sound, faulty_hook(source))
    assert read.failures == ()
    assert set(read.backends) == {"acme", "sound"}


@pytest.mark.parametrize(
    ("body", "expected"),
    [
        ("raise OSError('no data file')", "no data file"),
        ("import sys; sys.exit()", "SystemExit"),
        ("return None", "TypeError"),
        ("return 'acme'", "str"),
        ("return [object()]", "object"),
        (
            "from lostwork import ProcessDescriptor\n"
            "    return [ProcessDescriptor('a', 'b', 'c:D', api_version=1)]",
            "ProcessDescriptor",
        ),
        ("return [BackendDescriptor('acme', 'A gas.', 'gas', api_version=1)]", "target"),
    ],
)
def test_a_hook_that_fails_does_not_hide_the_other_hooks_of_its_plugin(sound, body, expected):
    source = f"""
from lostwork import CheckDescriptor
@hookimpl
def lostwork_backends():
    {body}
@hookimpl
def lostwork_checks():
    yield CheckDescriptor("drift", "Meters drift.", "gas:Drift", api_version=1)
"""
    read = read_with(sound, faulty_hook(source))
    failures = {failure.stage for failure in read.failures}
    assert failures == {"describe"}
    assert expected in str(read.failures[0].error)
    assert read.check("drift").plugin == "faulty"
    assert list(read.backends) == ["sound"]


def test_what_is_no_descriptor_is_refused_and_the_descriptors_beside_it_stand(sound):
    source = f"@hookimpl\ndef lostwork_backends(): return [3, {DESCRIBED}]"
    read = read_with(sound, faulty_hook(source))
    assert only_failure(read).stage == "describe"
    assert read.backend("acme").distribution == "a-faulty-one"


def test_a_malformed_descriptor_is_the_chained_cause(sound):
    malformed = "BackendDescriptor('a:b', 's', 'm:C', api_version=1)"
    source = f"@hookimpl\ndef lostwork_backends(): return [{malformed}]"
    failure = only_failure(read_with(sound, faulty_hook(source)))
    assert isinstance(failure.error.__cause__, DescriptorError)


def test_a_name_that_one_plugin_offers_twice_means_neither(sound):
    read = read_with(
        sound, faulty_hook(f"@hookimpl\ndef lostwork_backends(): return [{DESCRIBED}] * 2")
    )
    assert only_failure(read).descriptor == "acme"
    with pytest.raises(PluginNotFound) as refused:
        read.backend("acme")
    assert refused.value.__cause__ is read.failures[0].error


@pytest.mark.parametrize("version", [PLUGIN_API + 1, PLUGIN_API + 7])
def test_a_descriptor_for_another_interface_is_refused_and_the_one_beside_it_stands(sound, version):
    other = DESCRIBED.replace("acme", "later").replace("=1", f"={version}")
    source = f"@hookimpl\ndef lostwork_backends(): return [{other}, {DESCRIBED}]"
    read = read_with(sound, faulty_hook(source))
    failure = only_failure(read)
    assert (failure.stage, failure.descriptor) == ("api", "later")
    assert isinstance(failure.error, ApiVersionMismatch)
    assert failure.error.written_for == version
    assert failure.fix == "pip install --upgrade lostwork"
    assert read.backend("acme").name == "acme"
    with pytest.raises(PluginNotFound) as refused:
        read.backend("later")
    assert refused.value.__cause__ is failure.error


def test_a_descriptor_for_an_older_interface_sends_the_user_to_its_distribution(sound, monkeypatch):
    monkeypatch.setattr("lostwork.plugins.hooks.PLUGIN_API", 2)
    read = Plugins(sound.entry_points())
    (failure,) = read.failures
    assert failure.stage == "api"
    assert failure.fix == "pip install --upgrade sound-gases"


@pytest.mark.parametrize(
    ("source", "kind"),
    [
        ("raise RuntimeError", PluginFailed),
        (faulty_hook("@hookimpl\ndef lostwork_chekcs(): return []"), PluginFailed),
        (faulty_hook("@hookimpl\ndef lostwork_checks(): return 1 / 0"), PluginFailed),
        (
            faulty_hook(
                f"@hookimpl\ndef lostwork_backends(): return [{DESCRIBED.replace('=1', '=9')}]"
            ),
            ApiVersionMismatch,
        ),
    ],
)
def test_a_strict_reading_raises_the_first_failure(sound, source, kind):
    with pytest.raises(kind):
        read_with(sound, source, strict=True)


@pytest.mark.parametrize("blocked", ["faulty", "a-faulty-one:faulty"])
def test_a_blocked_plugin_is_not_imported_and_is_listed_as_blocked(sound, blocked):
    read = read_with(sound, "raise RuntimeError", blocked=[blocked])
    assert read.failures == ()
    assert "faulty_plugin" not in sys.modules
    assert [one.plugin for one in read.installed if one.blocked] == ["faulty"]


def test_plugins_are_read_in_order_of_distribution_and_name(site, plugin_offering):
    for letter in "abcd":
        site.module(f"plugin_{letter}", plugin_offering(letter))
    site.distribution("zebra", {"b": "plugin_b", "a": "plugin_a"})
    site.distribution("aardvark", {"d": "plugin_d", "c": "plugin_c"})
    read = Plugins(site.entry_points())
    assert [one.plugin for one in read.installed] == ["c", "d", "a", "b"]


def test_an_entry_point_found_twice_is_one_plugin(sound):
    read = Plugins(sound.entry_points() * 2)
    assert len(read.installed) == 1
    assert read.failures == ()


def test_a_second_plugin_of_one_name_and_distribution_is_refused_and_the_first_stays(
    sound, plugin_offering
):
    distribution = sound.entry_points()[0].dist
    second = EntryPoint("sound", "zz_another_plugin", "lostwork")._for(distribution)
    sound.module("zz_another_plugin", plugin_offering("another"))
    failure = only_failure(Plugins([second, *sound.entry_points()]))
    assert failure.stage == "register"


def test_one_module_under_two_entry_points_is_read_once(sound):
    sound.distribution("copycat", {"copy": "sound_plugin"})
    read = Plugins(sound.entry_points())
    (failure,) = read.failures
    assert failure.stage == "register"
    assert list(read.backends) == ["sound"]


def test_an_entry_point_without_a_distribution_goes_by_its_own_name(site, plugin_offering):
    site.module("loose_plugin", plugin_offering("loose"))
    read = Plugins([EntryPoint("stray", "loose_plugin", "lostwork")])
    assert read.backend("stray:loose") is read.backend("loose")


class Embedded:
    """A plugin made inside a host program."""

    @hookimpl
    def lostwork_backends(self):
        """Offer one backend."""
        return [BackendDescriptor("hosted", "A gas.", "gas:Gas", api_version=1)]


def test_a_host_program_adds_a_plugin_of_its_own(sound):
    read = Plugins(sound.entry_points())
    before = read.backends
    read.register(Embedded(), "host")
    assert read.backend("hosted") is read.backend("host:hosted")
    assert set(read.backends) == {"hosted", "sound"}
    assert "hosted" not in before
    assert [one.plugin for one in read.installed] == ["sound", "host"]


@pytest.mark.parametrize("name", ["sound", "sound-gases", "Sound_Gases", "", "a:b"])
def test_a_plugin_of_a_host_program_needs_a_name_of_its_own(sound, name):
    read = Plugins(sound.entry_points())
    with pytest.raises(PluginFailed):
        read.register(Embedded(), name)
    assert len(read.installed) == 1


def test_a_plugin_of_a_host_program_that_fails_leaves_nothing_behind(sound):
    class Faulty(Embedded):
        @hookimpl
        def lostwork_checks(self):
            return ["drift"]

    read = Plugins(sound.entry_points())
    with pytest.raises(PluginFailed):
        read.register(Faulty(), "host")
    assert set(read.backends) == {"sound"}
    assert len(read.installed) == 1
    read.register(Embedded(), "host")
    assert read.backend("hosted").plugin == "host"


def test_a_plugin_of_a_host_program_may_clash_with_one_that_is_installed(sound, plugin_offering):
    sound.module("second", plugin_offering("hosted"))
    sound.distribution("second", {"second": "second"})
    read = Plugins(sound.entry_points())
    read.register(Embedded(), "host")
    with pytest.raises(PluginClash) as clash:
        read.backend("hosted")
    assert clash.value.choices == ("host:hosted", "second:hosted")
