"""A network as it is, drawn up as a Pattern: every piece laid flat, nothing moved to suit any goods."""

from seamwright.assemble import assemble
from seamwright.fit.goods import get
from seamwright.fit.judge import Judged
from seamwright.fit.tailored import Tailored
from seamwright.flat import flatten
from seamwright.seams.network import cut_through
from seamwright.seams.opened import opened
from seamwright.wishes import Wishes

GOODS = "spandex"  # only so that the pattern has some; their limits change nothing here


def network_of(ladder, cut):
    """The Network, metres, of a cut on a Ladder's form, every piece a disk."""
    return opened(cut_through(ladder.levels[-1], cut, 1 / ladder.factor))


def drawn(form, network, planes=()):
    """The Pattern of a Network on a Form of one part; planes: those of symmetry that the network keeps."""
    flats = [flatten(network.piece_surface(k)[0]).flat for k in range(network.pieces[0])]
    judged = [Judged(1.0, None, flat, []) for flat in flats]
    return assemble(form, form.surface, get(GOODS), Wishes(goods=GOODS), [(Tailored(network, judged), list(planes))], [])
