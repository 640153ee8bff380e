import itertools

from workbench.views.colours import alloy_looks, map_colours


def test_twenty_four_alloys_differ():
    looks = alloy_looks(str(number) for number in range(24))
    assert len(set(looks.values())) == 24


def test_neighbours_differ_in_hue_and_dash():
    looks = list(alloy_looks("ABCD").values())
    for one, other in itertools.pairwise(looks):
        assert one.colour != other.colour
        assert one.dash != other.dash


def test_the_map_grows_lighter():
    def luminance(colour: str) -> float:
        red, green, blue = (int(colour[at : at + 2], 16) for at in (1, 3, 5))
        return 0.2126 * red + 0.7152 * green + 0.0722 * blue

    lights = [luminance(colour) for colour in map_colours([0.0, 0.25, 0.5, 0.75, 1.0])]
    assert lights == sorted(lights)
