"""A loop opened at a signal."""

from __future__ import annotations

from flint import fmpq_poly

from specgate.systems.blocks import Instance, LinearForm, SignalRef, Wiring
from specgate.systems.equations import Equations, Reference
from specgate.systems.feedthrough import AlgebraicLoop
from specgate.systems.network import Network
from specgate.systems.polynomials import ONE, exact_quotient, monic
from specgate.systems.stability import is_hurwitz
from specgate.systems.transfer import TransferFunction
from specgate.systems.wellposed import algebraic_loop
from specgate.terms.records import record

_INJECTED = "(injected)"


@record
class OpenLoop:
    """The loop opened for all users of a signal.

    numerator, denominator: of L = det P / det P_open - 1, minus the transfer function from the injected to the returned
    signal, not reduced: the denominator has every mode of the opened component. stable: whether every mode of the
    closed component decays. algebraic_loop: set where the opened loop is not well posed; then there is no L.
    """

    signal: str
    numerator: fmpq_poly
    denominator: fmpq_poly
    stable: bool
    algebraic_loop: AlgebraicLoop | None = None

    @property
    def transfer(self) -> TransferFunction:
        """L. Raises ValueError where the opened loop is not well posed."""
        if self.algebraic_loop is not None:
            raise ValueError(self.algebraic_loop.reason)
        return TransferFunction(self.numerator, self.denominator)


def opened(network: Network, signal: str) -> OpenLoop:
    """Return the loop of a well-posed network opened at a signal. Raises KeyError for an unknown name."""
    node, cut = SignalRef(signal), Network(Equations(_cut(network.equations.wiring, signal)))
    closed = _modes_around(network, node)
    found = algebraic_loop(cut)
    if found is not None:
        reason = f"opened at {signal}, the loop leaves an algebraic loop behind. {found.reason}"
        return OpenLoop(signal, fmpq_poly(), fmpq_poly(), is_hurwitz(closed), AlgebraicLoop(found.signals, reason))
    returned = cut.fraction(node, SignalRef(_INJECTED))
    numerator, denominator = -returned.numerator, returned.denominator
    # 1 + L = det P / det P_open, and det P is known with all its modes.
    kept = exact_quotient(closed, monic(numerator + denominator))
    return OpenLoop(signal, numerator * kept, denominator * kept, is_hurwitz(closed))


def _modes_around(network: Network, node: Reference) -> fmpq_poly:
    """Return the modes of the blocks in a cycle with a node and of what shares them; 1 if it stands in none."""
    component = next(component for component in network.equations.components if node in component)
    for group in network.groups:
        if any(output in component for output in group.outputs):
            return group.modes
    return ONE


def _cut(wiring: Wiring, signal: str) -> Wiring:
    """Return the wiring with an outside variable in place of every use of a signal."""
    if signal not in wiring.signals:
        raise KeyError(signal)

    def replaced(form: LinearForm) -> LinearForm:
        used, outside = SignalRef(signal), SignalRef(_INJECTED)
        return LinearForm(tuple((factor, outside if node == used else node) for factor, node in form.terms))

    return Wiring(
        (*wiring.inputs, _INJECTED),
        tuple(
            Instance(i.name, i.block, {name: replaced(argument) for name, argument in i.arguments.items()})
            for i in wiring.instances
        ),
        {name: replaced(form) for name, form in wiring.signals.items()},
    )
