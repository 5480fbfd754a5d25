"""Which uses of a signal a break cuts: all, or those in the equation of one signal or at the input of one block.

A block that is applied in the equation of a signal belongs to that equation: `command: compensator(demand - position)`
uses `position`. One block has one input, so that its use is cut wherever its output is read.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from specgate.project import faults
from specgate.project.faults import Fault
from specgate.project.instances import Form, NameRef, Use, UseRef
from specgate.project.types import Break
from specgate.systems.opening import Cut
from specgate.terms.records import record


@record
class Applied:
    """The equations of a loop: signals as sums, applied blocks by name with their use and subsystem.

    instance: the name of the applied block that a use is.
    """

    forms: Mapping[str, Form]
    uses: Mapping[str, Use]
    instance: Mapping[int, str]

    def cut(self, opened: Break) -> Cut:
        """Return what a break cuts. Raises Fault where its user does not use the signal."""
        if opened.at in opened.with_open:
            message = f"`{opened.at}` is where the loop is opened: leave it out of `with_open`"
            raise Fault(faults.VALUE, message, opened.place)
        if opened.into is None:
            return Cut(held=opened.with_open)
        forms = (opened.into,) if self._reads(self.forms.get(opened.into, {}), opened.at) else ()
        nested = self._nested(self.forms[opened.into]) if opened.into in self.forms else iter(())
        named = (name for name, use in self.uses.items() if use.call.subsystem == opened.into)
        fed = tuple(name for name in dict.fromkeys((*named, *nested)) if self._fed(name, opened.at))
        cut = Cut(forms, fed, opened.with_open)
        if cut.everywhere():
            raise Fault(faults.NAME, self._unused(opened), opened.place)
        return cut

    def _reads(self, form: Form, signal: str) -> bool:
        return NameRef(signal) in form

    def _fed(self, instance: str, signal: str) -> bool:
        return any(self._reads(form, signal) for form in self.uses[instance].arguments.values())

    def _nested(self, form: Form) -> Iterator[str]:
        """Give the blocks that are applied in a form, those in their arguments included."""
        for atom in form:
            if isinstance(atom, UseRef):
                name = self.instance[atom.use]
                yield name
                for argument in self.uses[name].arguments.values():
                    yield from self._nested(argument)

    def _unused(self, opened: Break) -> str:
        signals = [f"`{name}`" for name, form in self.forms.items() if self._reads(form, opened.at)]
        blocks = [f"`{use.call.subsystem}`" for name, use in self.uses.items() if self._fed(name, opened.at)]
        users = list(dict.fromkeys((*blocks, *signals)))
        said = f"it is used by {', '.join(users)}" if users else "nothing uses it"
        return f"`{opened.into}` does not use `{opened.at}`, so that there is nothing to cut: {said}"
