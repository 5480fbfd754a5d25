"""Modes that no channel of a wiring shows, and the components they belong to."""

from __future__ import annotations

from collections.abc import Sequence

from flint import fmpq_poly

from specgate.systems.blocks import SignalRef
from specgate.systems.minimal import shown_modes
from specgate.systems.network import Group, Network
from specgate.systems.polynomials import ONE, exact_quotient, least_common_multiple, monic, product
from specgate.systems.transfer import TransferFunction


def hidden_modes(network: Network) -> tuple[fmpq_poly, ...]:
    """Return, for each group of the network, its modes that no channel from any input to any signal shows (monic).

    Where two groups have the same mode and only one of them hides it, the channels through each of them tell which.
    """
    groups = network.groups
    left = _concealed(network, groups, network.equations.inputs, [SignalRef(name) for name in network.equations.forms])
    if left.degree() == 0:
        return (left,) * len(groups)
    found = [ONE] * len(groups)
    for index, group in enumerate(groups):
        share = left.gcd(group.modes)
        if share.degree() > 0:
            found[index] = share.gcd(_concealed_around(network, group))
            left = exact_quotient(left, found[index])
    for index, group in enumerate(groups):
        share = left.gcd(exact_quotient(group.modes, found[index]))
        found[index] = monic(found[index] * share)
        left = exact_quotient(left, share)
    return tuple(found)


def _concealed_around(network: Network, group: Group) -> fmpq_poly:
    """Return the hidden modes of what acts on a group or is acted on by it."""
    before, after = network.upstream(group.outputs), network.downstream(group.outputs)
    sources = [source for source in network.equations.inputs if source in before]
    signals = [SignalRef(name) for name in network.equations.forms]
    targets = [signal for signal in signals if signal in before or signal in after]
    between = network.downstream(sources) & network.upstream(targets)
    near = before | after | between
    return _concealed(network, [g for g in network.groups if not near.isdisjoint(g.outputs)], sources, targets)


def _concealed(
    network: Network, groups: Sequence[Group], sources: Sequence[SignalRef], targets: Sequence[SignalRef]
) -> fmpq_poly:
    modes = product(group.modes for group in groups)
    matrix: list[list[TransferFunction]] = []
    common = ONE
    for target in reversed(targets):
        matrix.append([network.fraction(target, source) for source in sources])
        common = least_common_multiple([common, *(entry.denominator for entry in matrix[-1])])
        # Signals far downstream usually show everything at once.
        if common.degree() == modes.degree():
            return ONE
    return exact_quotient(modes, shown_modes(matrix))
