"""Many one-at-a-time calls answered by one vectorised call, for libraries that know no vectors."""

from __future__ import annotations

import threading
from collections.abc import Callable, Iterable
from concurrent.futures import ThreadPoolExecutor
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
Argument = TypeVar("Argument")
Result = TypeVar("Result")


class Lanes:
    """A pool whose threads meet: when every one of them asks for a value, all are computed together.

    Each thread is one lane. A lane that asks waits until the others have asked too or have finished; the last to come
    evaluates for all, in the order of the lanes, so that the same arguments give the same values bit for bit.
    """

    def __init__(self, function: Callable[[FloatArray], FloatArray], size: int) -> None:
        """Take the vectorised function, (n, d) to (n,), and the number of lanes."""
        self.function = function
        self.size = size
        self._meeting = threading.Condition()
        self._running = 0
        self._asked: dict[int, tuple[FloatArray, list[float | BaseException]]] = {}
        self._lane_of_thread = threading.local()

    def map(self, work: Callable[[Argument], Result], arguments: Iterable[Argument]) -> list[Result]:
        """Return ``work`` of every argument, as many side by side as there are lanes."""
        found: list[Result] = []
        items = list(arguments)
        for start in range(0, len(items), self.size):
            part = items[start : start + self.size]
            self._running = len(part)
            with ThreadPoolExecutor(len(part)) as threads:
                found += threads.map(lambda numbered: self._lane(work, *numbered), enumerate(part))
            self._running = 0
        return found

    def value(self, x: FloatArray) -> float:
        """Return the function at one point (d,), together with the points of the other lanes."""
        if self._running == 0:
            return float(self.function(x[None])[0])
        answer: list[float | BaseException] = []
        with self._meeting:
            self._asked[self._lane_of_thread.number] = (x, answer)
            self._answer_if_all_asked()
            self._meeting.wait_for(lambda: bool(answer))
        if isinstance(answer[0], BaseException):
            raise answer[0]
        return answer[0]

    def _lane(self, work: Callable[[Argument], Result], number: int, item: Argument) -> Result:
        self._lane_of_thread.number = number
        try:
            return work(item)
        finally:
            with self._meeting:
                self._running -= 1
                self._answer_if_all_asked()

    def _answer_if_all_asked(self) -> None:
        if not self._asked or len(self._asked) < self._running:
            return
        asked = [self._asked[number] for number in sorted(self._asked)]
        self._asked = {}
        try:
            values: list[float | BaseException] = self.function(np.array([x for x, _ in asked])).tolist()
        except BaseException as error:  # noqa: BLE001  every waiting lane must wake, with the error
            values = [error] * len(asked)
        for (_, answer), value in zip(asked, values, strict=True):
            answer.append(value)
        self._meeting.notify_all()
