"""Cases as they are read."""

from tests.network.small import LIQUID, description_of, errors_of

RUN = LIQUID + '[source.P1]\n[terminal.T]\nfrom = "P1"\nflow = 0.1\ndrop = 10\n'


def test_a_case_is_read_whole() -> None:
    text = RUN + (
        '[case.night]\ntitle = "Night"\nnote = "by the clock"\noff = ["T"]\nshare = { T = "40 %" }\n'
        'stroke = { T = 0.5 }\nsource = { P1 = { speed = 0.8, running = 2, set_point = "30 kPa" } }\n[case.plain]\n'
    )
    cases = description_of(text).cases
    assert list(cases) == ["night", "plain"]
    night = cases["night"]
    assert (night.id, night.path, night.title, night.note) == ("night", ("case", "night"), "Night", "by the clock")
    assert night.off == ("T",)
    assert (night.share, night.stroke) == ({"T": 0.4}, {"T": 0.5})
    source = night.sources["P1"]
    assert (source.speed, source.running) == (0.8, 2)
    assert source.set_point is not None
    assert source.set_point.value == 30e3
    assert (cases["plain"].off, cases["plain"].sources) == ((), {})
    assert errors_of(text) == []


def test_names_that_the_run_does_not_have_are_found() -> None:
    text = (
        RUN + '[case.c]\noff = ["T", "X"]\nshare = { Y = 0.5 }\nstroke = { Z = 0.5 }\nsource = { T = { speed = 1 } }\n'
    )
    assert errors_of(text) == [
        ("dangling", "case.c.off.1"),
        ("dangling", "case.c.share.Y"),
        ("dangling", "case.c.stroke.Z"),
        ("dangling", "case.c.source.T"),
    ]
