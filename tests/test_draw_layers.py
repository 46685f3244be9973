"""The layout of graphs: laws on drawn graphs, and small ones by hand."""

from itertools import combinations, pairwise

from hypothesis import given
from hypothesis import strategies as st

from seqcheck.reports.drawing.layers import Extent, Layout, Link, layout

NODE = Extent(100, 20, 20)
LABEL = Extent(60, 20, 5)


@st.composite
def graphs(draw: st.DrawFn) -> tuple[list[Extent], list[Link]]:
    """Graphs of up to nine nodes, with circles and several links between two."""
    count = draw(st.integers(1, 9))
    sizes = st.floats(10, 90)
    nodes = [Extent(draw(sizes), draw(sizes), draw(sizes)) for _ in range(count)]
    ends = st.tuples(st.integers(0, count - 1), st.integers(0, count - 1)).filter(lambda pair: pair[0] != pair[1])
    pairs = draw(st.lists(ends, max_size=14)) if count > 1 else []
    return nodes, [Link(*pair, Extent(draw(sizes), draw(sizes), draw(sizes))) for pair in pairs]


def box(along: float, across: float, extent: Extent) -> tuple[float, float, float, float]:
    return along, across - extent.before, along + extent.along, across + extent.after


def boxes(found: Layout, links: list[Link]) -> list[tuple[float, float, float, float]]:
    nodes = [
        box(along - extent.along / 2, across, extent)
        for (along, across), extent in zip(found.centres, found.extents, strict=True)
    ]
    return nodes + [box(*route.label, link.label) for route, link in zip(found.routes, links, strict=True)]


@given(graphs())
def test_nothing_covers_anything_and_all_is_on_the_sheet(graph: tuple[list[Extent], list[Link]]) -> None:
    nodes, links = graph
    found = layout(nodes, links, [])
    every = boxes(found, links)
    for one, other in combinations(every, 2):
        gap = max(one[0] - other[2], other[0] - one[2], one[1] - other[3], other[1] - one[3])
        assert gap >= -1e-6, (one, other)
    assert min(one[0] for one in every) >= -1e-6
    assert min(one[1] for one in every) >= -1e-6
    assert max(one[2] for one in every) <= found.along + 1e-6
    assert max(one[3] for one in every) <= found.across + 1e-6


@given(graphs())
def test_a_route_leads_from_its_source_to_its_target(graph: tuple[list[Extent], list[Link]]) -> None:
    nodes, links = graph
    found = layout(nodes, links, [])
    for link, route in zip(links, found.routes, strict=True):
        for node, (along, across) in ((link.source, route.places[0][0]), (link.target, route.places[-1][1])):
            centre, extent = found.centres[node], found.extents[node]
            assert abs(abs(along - centre[0]) - extent.along / 2) < 1e-6
            assert -extent.before <= across - centre[1] <= extent.after
        steps = [place[0] for pair in route.places for place in pair]
        assert steps in (sorted(steps), sorted(steps, reverse=True))
        assert all(one[1] == other[1] for one, other in route.places)


@given(graphs())
def test_a_layout_depends_on_nothing_else(graph: tuple[list[Extent], list[Link]]) -> None:
    assert layout(*graph, []) == layout(*graph, [])


def test_a_chain_is_straight_and_a_way_back_is_not_on_it() -> None:
    links = [Link(0, 1, LABEL), Link(1, 2, LABEL), Link(2, 0, LABEL)]
    found = layout([NODE] * 3, links, [])
    along = [centre[0] for centre in found.centres]
    assert along == sorted(along)
    assert len({round(after - before, 6) for before, after in pairwise(along)}) == 1
    assert found.routes[2].places[0][0][0] > found.routes[2].places[-1][1][0]


def test_a_lead_stands_right_before_its_target() -> None:
    found = layout([NODE, NODE, NODE], [Link(0, 1, LABEL), Link(2, 0, LABEL)], [2])
    assert found.centres[2][0] == found.centres[1][0] > found.centres[0][0]
    found = layout([NODE, NODE, NODE], [Link(0, 1, LABEL), Link(2, 1, LABEL)], [2])
    assert found.centres[2][0] == found.centres[0][0] < found.centres[1][0]


def test_two_links_that_need_not_cross_do_not() -> None:
    links = [Link(0, 1, LABEL), Link(0, 2, LABEL), Link(1, 4, LABEL), Link(2, 3, LABEL)]
    found = layout([NODE] * 5, links, [])
    assert (found.centres[1][1] < found.centres[2][1]) == (found.centres[4][1] < found.centres[3][1])
