"""What layers, bodies and files leave out, filled in by the published relations that the scenario names."""

from dataclasses import dataclass

import numpy as np

from groundroll.errors import InputError
from groundroll.scenario import FillMissing

from .relations import RELATIONS

Arrays = dict[str, np.ndarray | None]


@dataclass(frozen=True)
class Filling:
    """The relations of `[ground.fill_missing]`; None: there are none."""

    relations: FillMissing | None

    def gives(self, name: str) -> bool:
        """Whether a relation gives the quantity."""
        return getattr(self.relations, name, None) is not None

    def complete(self, values: Arrays, where: str) -> dict[str, np.ndarray]:
        """`values` with no None left: a speed from the other speed first, then density from vp.

        `where` goes before the quantity's name in messages. InputError outside the range of a relation.
        """
        filled = dict(values)
        for name in ("vp", "vs", "density"):
            if filled[name] is None:
                filled[name] = self._by_relation(name, filled, where)
        return filled

    def _by_relation(self, name: str, values: Arrays, where: str) -> np.ndarray:
        relation_name = getattr(self.relations, name)
        relation = RELATIONS[name, relation_name]
        speed = values[relation.given]
        outside = speed[(speed < relation.least) | (speed > relation.most)]
        if outside.size:
            raise InputError(
                f"{where}{name}: left out, and {relation_name} does not reach that far "
                f"(received {relation.given} = {outside.flat[0]:g} m/s); "
                f"allowed {relation.given} from {relation.least:g} to {relation.most:g} m/s; give {name} there"
            )
        return relation(speed)
