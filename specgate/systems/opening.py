"""A loop opened at a signal."""

from __future__ import annotations

from collections.abc import Callable

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

INJECTED = "(injected)"
"""Name of the outside variable that stands for a signal where its loop is opened."""


@record
class Cut:
    """Which uses of a signal are cut, and which signals are held open (every use of them sees zero) meanwhile.

    forms: signals in whose equations the signal is cut. instances: applied blocks in whose arguments it is. None of
    either: all its uses.
    """

    forms: tuple[str, ...] = ()
    instances: tuple[str, ...] = ()
    held: tuple[str, ...] = ()

    def everywhere(self) -> bool:
        """Whether all uses are cut."""
        return not self.forms and not self.instances


@record
class OpenLoop:
    """The loop opened at a signal, for all its users or for some.

    numerator, denominator: of L = det P / det P_open - 1, minus the transfer function from the injected to the returned
    signal, not reduced: the denominator has every mode of the opened component. stable: whether every mode of the
    closed component decays, with the held signals open. algebraic_loop: set where the opened loop is not well posed, or
    what is left with the held signals open; then there is no L.
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


def opened(network: Network, signal: str, cut: Cut | None = None) -> OpenLoop:
    """Return the loop of a well-posed network opened at a signal. Raises KeyError for an unknown name."""
    cut = cut or Cut()
    whole = network if not cut.held else Network(Equations(held_open(network.equations.wiring, cut.held)))
    if cut.held:
        found = algebraic_loop(whole)
        if found is not None:
            return _ill_posed(signal, f"with {', '.join(cut.held)} open", found, stable=False)
    node, opening = SignalRef(signal), Network(Equations(cut_at(whole.equations.wiring, signal, cut)))
    closed = _modes_around(whole, node)
    found = algebraic_loop(opening)
    if found is not None:
        return _ill_posed(signal, f"opened at {signal}", found, stable=is_hurwitz(closed))
    returned = opening.fraction(node, SignalRef(INJECTED))
    numerator, denominator = -returned.numerator, returned.denominator
    # 1 + L = det P / det P_open, and det P is known with all its modes.
    kept = exact_quotient(closed, monic(numerator + denominator))
    return OpenLoop(signal, numerator * kept, denominator * kept, is_hurwitz(closed))


def _ill_posed(signal: str, when: str, found: AlgebraicLoop, *, stable: bool) -> OpenLoop:
    reason = f"{when}, the loop leaves an algebraic loop behind. {found.reason}"
    return OpenLoop(signal, fmpq_poly(), fmpq_poly(), stable, AlgebraicLoop(found.signals, reason))


def _modes_around(network: Network, node: Reference) -> fmpq_poly:
    """Return the modes of the blocks in a cycle with a node and of what shares them; 1 if it stands in none."""
    component = next(component for component in network.equations.components if node in component)
    for group in network.groups:
        if any(output in component for output in group.outputs):
            return group.modes
    return ONE


def cut_at(wiring: Wiring, signal: str, cut: Cut) -> Wiring:
    """Return the wiring with an outside variable in place of the uses of a signal that are cut."""
    if signal not in wiring.signals:
        raise KeyError(signal)
    everywhere = cut.everywhere()
    return _replaced(
        wiring,
        SignalRef(signal),
        INJECTED,
        lambda name: everywhere or name in cut.forms,
        lambda name: everywhere or name in cut.instances,
    )


def held_open(wiring: Wiring, signals: tuple[str, ...]) -> Wiring:
    """Return the wiring with an outside variable, which nothing drives, in place of every use of some signals."""
    for signal in signals:
        if signal not in wiring.signals:
            raise KeyError(signal)
        wiring = _replaced(wiring, SignalRef(signal), f"({signal} held open)", _always, _always)
    return wiring


def _always(_: str) -> bool:
    return True


def _replaced(
    wiring: Wiring,
    used: SignalRef,
    outside: str,
    in_form: Callable[[str], bool],
    in_instance: Callable[[str], bool],
) -> Wiring:
    def replaced(form: LinearForm) -> LinearForm:
        return LinearForm(tuple((factor, SignalRef(outside) if node == used else node) for factor, node in form.terms))

    return Wiring(
        (*wiring.inputs, outside),
        tuple(
            Instance(i.name, i.block, {name: replaced(argument) for name, argument in i.arguments.items()})
            if in_instance(i.name)
            else i
            for i in wiring.instances
        ),
        {name: replaced(form) if in_form(name) else form for name, form in wiring.signals.items()},
    )
