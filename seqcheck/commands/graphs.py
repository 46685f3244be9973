"""The mode graph of a drive with what each of its rows does, for the reports."""

from seqcheck.circuit.reading import RowReader
from seqcheck.drive import Drive
from seqcheck.modegraph import ModeGraph
from seqcheck.reports.drawing.chart import Graph, Way


def graph_of(drive: Drive) -> Graph:
    """The mode graph as reports see it. Raises Problems for a row that stands for too many words."""
    found, reader = ModeGraph(drive), RowReader(drive)
    ways = tuple(Way(one.run, one.source, one.possible) for one in found.ways)
    rows = {mode: reader.row(drive.modes[mode]) for mode in found.modes}
    return Graph(drive, found.modes, ways, found.reached, rows)
