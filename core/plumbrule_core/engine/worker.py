"""The worker process: reads one order from stdin, answers it, and speaks events as JSON lines.

The first line on stdin is the order; later lines are wishes, `{"ask": "stop"}` or `{"ask": "kill"}`.
The end of stdin means that nobody waits any more: the worker ends at once.
"""

import faulthandler
import json
import os
import sys
import threading
from collections.abc import Mapping
from typing import BinaryIO

from pydantic import ValidationError

from plumbrule_core.documents.events import PROTOCOL, Failed, Hello
from plumbrule_core.documents.faults import faults_of
from plumbrule_core.engine.chain import Chain, Take
from plumbrule_core.engine.order import MAX_ORDER, Order
from plumbrule_core.engine.own_process import be_polite, end_with_parent, private_channel
from plumbrule_core.engine.speaking import PARENT_GONE, Speaker
from plumbrule_core.errors import Refused
from plumbrule_core.rungs.protocol import Rung

ORDER_REFUSED = 2
"""Exit status where the order could not be read."""


def main() -> int:
    """Answer one order with the rungs and readings of this program."""
    from plumbrule_core.judgement.readings import take
    from plumbrule_core.planning import versions
    from plumbrule_core.rungs import RUNGS

    return serve(RUNGS, take, versions())


def serve(rungs: Mapping[str, Rung], take: Take, versions: Mapping[str, str]) -> int:
    """Answer one order; returns the exit status."""
    speaker = Speaker(private_channel())
    end_with_parent()
    be_polite()
    faulthandler.enable()
    speaker.say(Hello, protocol=PROTOCOL, versions=versions)
    stdin = sys.stdin.buffer
    try:
        order = _read_order(stdin)
    except Refused as refusal:
        speaker.say(Failed, task="", reason=f"the worker cannot read its order: {refusal}")
        return ORDER_REFUSED
    asked_to_stop = threading.Event()
    threading.Thread(target=_listen, args=(stdin, asked_to_stop), daemon=True).start()
    if order.tasks:
        Chain(order, rungs, take, versions, speaker, asked_to_stop).run()
    else:
        _warm_up()
    return 0


def _read_order(stdin: BinaryIO) -> Order:
    line = stdin.readline(MAX_ORDER)
    if not line:
        os._exit(PARENT_GONE)
    try:
        return Order.from_json(line)
    except ValidationError as error:
        raise Refused(faults_of(error, "order")) from error


def _listen(stdin: BinaryIO, asked_to_stop: threading.Event) -> None:
    for line in stdin:
        wish = _wish(line)
        if wish == "stop":
            asked_to_stop.set()
        elif wish == "kill":
            break
        else:
            print(f"a wish that is not known: {line[:200]!r}", file=sys.stderr)
    os._exit(PARENT_GONE)


def _wish(line: bytes) -> object:
    try:
        said = json.loads(line)
    except ValueError:
        return None
    return said.get("ask") if isinstance(said, dict) else None


def _warm_up() -> None:
    import pyscf.cc
    import pyscf.scf  # noqa: F401


if __name__ == "__main__":
    # Not sys.exit: a library's exit handlers or threads must not keep a finished worker alive.
    os._exit(main())
