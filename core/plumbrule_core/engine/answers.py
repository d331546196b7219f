"""What of a chain is known already, and what ceases to be when a rung below ends elsewhere than before."""

from plumbrule_core.documents.plan import Task
from plumbrule_core.engine.order import Known, Order
from plumbrule_core.planning.solutions import SAME


class Answers:
    """The known tasks of one order, less those that stand on a solution which was not found again."""

    def __init__(self, order: Order) -> None:
        self._order = order
        self._known: dict[str, Known] = dict(order.known)

    def __contains__(self, task: Task) -> bool:
        return task.id in self._known

    def moved(self, task: Task, energy: float) -> str:
        """Forget a known task that was found at another energy (hartree); the sentence says so."""
        before = self._known.get(task.id)
        if before is None or abs(energy - before.energy) <= SAME:
            return ""
        self._forget_upon(task, energy, before.energy)
        del self._known[task.id]
        return (
            f"{task.spec.rung} reached another solution than before: {energy:.6f} hartree in place of "
            f"{before.energy:.6f} hartree; what stands on it is computed anew"
        )

    def settle(self, task: Task, energy: float) -> None:
        """A task has its answer: tasks that stood on another energy (hartree) of it are known no more."""
        self._forget_upon(task, energy, energy)

    def _forget_upon(self, task: Task, energy: float, unless_said: float) -> None:
        for other in self._order.tasks:
            known = self._known.get(other.id)
            if known is None or task.spec.rung not in other.needs:
                continue
            if abs(known.stands_on.get(task.spec.rung, unless_said) - energy) > SAME:
                del self._known[other.id]
