"""--set KEY=VALUE."""

from __future__ import annotations

import copy

import pytest

from fluidev.case.overrides import with_overrides
from fluidev.errors import CaseError

DATA = {
    "title": "x",
    "device": {
        "outline": [[0, 0], [1, 0], [1, 1]],
        "contact": [{"name": "S", "entry": "normal"}, {"name": "a.b"}, {"name": "two words"}],
    },
    "reading": [{"name": "far pair", "current": ["S", "D"]}],
}


@pytest.mark.parametrize(
    ("override", "steps", "value"),
    [
        ('fluid.gurzhi_length="1 um"', ("fluid", "gurzhi_length"), "1 um"),
        ("fluid.gurzhi_length=1 um", ("fluid", "gurzhi_length"), "1 um"),
        (" title = a = b ", ("title",), "a = b"),
        ("title=", ("title",), ""),
        ("title=1\nreading=2", ("title",), "1\nreading=2"),
        ("tolerance=1e-3", ("tolerance",), 1e-3),
        ("device.walls.slip_length=inf", ("device", "walls", "slip_length"), float("inf")),
        ("device.mirrored=true", ("device", "mirrored"), True),
        ("device.contact.S.entry=free", ("device", "contact", 0, "entry"), "free"),
        ("device.contact[0].entry=free", ("device", "contact", 0, "entry"), "free"),
        ('device.contact."a.b".arc=[0, 90]', ("device", "contact", 1, "arc"), [0, 90]),
        ("device.contact.'a.b'.rim=inner", ("device", "contact", 1, "rim"), "inner"),
        ("device.contact.two words.rim=inner", ("device", "contact", 2, "rim"), "inner"),
        ("device.outline[2][1]=7", ("device", "outline", 2, 1), 7),
        ("device.contact=[]", ("device", "contact"), []),
        ('reading.far pair.current=["S", "A"]', ("reading", 0, "current"), ["S", "A"]),
        ('reading[0]={name = "n"}', ("reading", 0), {"name": "n"}),
    ],
)
def test_what_is_set(override: str, steps: tuple[str | int, ...], value: object) -> None:
    before = copy.deepcopy(DATA)
    found: object = with_overrides(DATA, [override])
    for step in steps:
        found = found[step]  # type: ignore[index]
    assert found == value
    assert type(found) is type(value)
    assert before == DATA


def test_overrides_are_put_in_one_after_the_other() -> None:
    changed = with_overrides(DATA, ["device.contact.S.name=Q", "device.contact.Q.entry=free"])
    assert changed["device"]["contact"][0] == {"name": "Q", "entry": "free"}


@pytest.mark.parametrize(
    ("override", "sentence"),
    [
        ("fluid", "bar.toml: --set = 'fluid': expected KEY=VALUE (such as "),
        ("=3", "bar.toml: --set = '=3': expected KEY=VALUE"),
        ("a..b=3", "bar.toml: --set = 'a..b=3': expected KEY=VALUE"),
        ("[0]=3", "bar.toml: --set = '[0]=3': expected KEY=VALUE"),
        (
            "device.contact[3].entry=free",
            "bar.toml: device.contact[3]: cannot be set, device.contact has 3 elements "
            "(counted from 0)",
        ),
        ("reading[1]=3", "bar.toml: reading[1]: cannot be set, reading has 1 element "),
        (
            "device.contact.Q.entry=free",
            "bar.toml: device.contact.Q: there is no 'Q' in device.contact; "
            "expected one of 'S', 'a.b', 'two words'",
        ),
        (
            "reading.far par.current=3",
            "bar.toml: reading.'far par': there is no 'far par' in reading; "
            "did you mean 'far pair'?",
        ),
        ("title.x=3", "bar.toml: title.x: cannot be set, title is text"),
        ("device[0]=3", "bar.toml: device[0]: cannot be set, device is a table"),
        ("device.outline.x=3", "bar.toml: device.outline.x: there is no 'x' in device.outline"),
    ],
)
def test_what_cannot_be_set(override: str, sentence: str) -> None:
    with pytest.raises(CaseError) as refused:
        with_overrides(DATA, [override], "bar.toml")
    assert str(refused.value).startswith(sentence)
