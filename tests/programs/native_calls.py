"""Real functions whose work grows inside C code: what steps alone make of them, and what is so.

The orders are those of the functions' own source: scans, copies, moves and sorts of n items where
the source says so, and the documentation of what they call. Written as powers of n, `n*log(n)`
for a sort of n items in no order.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class NativeCall:
    """A function to audit.

    Parameters
    ----------
    subject, feed : str
        As for `steplaw audit`.
    sizes : str
        Sizes at which it is timed: the operands fit into the processor's caches, where one rate
        for all visits can hold.
    steps, native : str
        Order of growth of steps, and of visits in C.
    why : str
        What hides the growth.
    not_charged : str
        A C call without a rule that must be listed.
    """

    subject: str
    feed: str
    sizes: str
    steps: str
    native: str
    why: str
    not_charged: str = ""

    @property
    def name(self) -> str:
        """The function's own name."""
        return self.subject.rsplit(":", 1)[1]


_QUAYS = "{'berths': {f'quay{k}': '1' for k in range(n)}}"
_TYPES = "m.types_map_inv[{}].__setitem__('cargo/list', [f'.{}{{k}}' for k in range(n)])"

CALLS = [
    NativeCall(
        "statistics:median",
        "[rng.random() for _ in range(n)]",
        "1024..65536",
        "1",
        "n*log(n)",
        "sort",
    ),
    NativeCall(
        "statistics:mode", "[rng.randrange(9) for _ in range(n)]", "256..16384", "1", "n", "tally"
    ),
    NativeCall(
        "collections:Counter.most_common",
        "collections.Counter({k: rng.random() for k in range(n)})",
        "64..8192",
        "1",
        "n*log(n)",
        "sort",
    ),
    NativeCall(
        "configparser:RawConfigParser.options",
        f"args((lambda p: (p.read_dict({_QUAYS}), p)[1])(configparser.RawConfigParser()),"
        " 'berths')",
        "64..4096",
        "1",
        "n",
        "copy of a dict",
    ),
    NativeCall(
        "mimetypes:MimeTypes.guess_all_extensions",
        f"args((lambda m: ({_TYPES.format(True, 'c')}, {_TYPES.format(False, 'd')}, m)[2])"
        "(mimetypes.MimeTypes()), 'cargo/list', False)",
        "16..1024",
        "n",
        "n**2",
        "membership of a list, in a loop",
    ),
    NativeCall(
        "mimetypes:MimeTypes.add_type",
        f"args((lambda m: ({_TYPES.format(True, 'c')}, m)[1])(mimetypes.MimeTypes()),"
        " 'cargo/list', '.quay')",
        "64..8192",
        "1",
        "n",
        "membership of a list",
    ),
    NativeCall(
        "shlex:split", "'x' * n", "1024..65536", "n", "n**2", "+= on a text that is an attribute"
    ),
    NativeCall(
        "networkx.generators.classic:_tree_edges",
        "args(n, 2)",
        "1024..65536",
        "n",
        "n**2",
        "pop(0) of a list, in a loop",
    ),
    NativeCall(
        "json:dumps",
        "[7] * n",
        "64..8192",
        "1",
        "n",
        "join of what is written",
        "Encoder",
    ),
    NativeCall("urllib.parse:quote", "'deck' * n", "256..16384", "1", "n", "strip and decoding"),
    NativeCall(
        "sched:scheduler.cancel",
        "(lambda s: args(s, [s.enterabs(k, 1, print) for k in range(n)][n - 1]))"
        "(sched.scheduler())",
        "64..8192",
        "1",
        "n",
        "remove from a list, heapify",
    ),
    NativeCall(
        "xml.dom.minidom:Node.removeChild",
        "(lambda d: args(d, [d.appendChild(xml.dom.minidom.Text()) for _ in range(n)][n - 1]))"
        "(xml.dom.minidom.Element('quay'))",
        "64..8192",
        "1",
        "n",
        "remove from a list",
    ),
    NativeCall(
        "collections:UserList.insert",
        "args(collections.UserList(range(n)), 0, 0)",
        "256..32768",
        "1",
        "n",
        "insertion at the front",
    ),
    NativeCall("copy:copy", "list(range(n))", "64..8192", "1", "n", "copy of a list"),
    NativeCall("html:escape", "'<quay> & deck' * n", "16..1024", "1", "n", "replace of a text"),
    NativeCall(
        "heapq:nlargest",
        "args(n, [rng.random() for _ in range(n)])",
        "64..8192",
        "1",
        "n*log(n)",
        "sort",
    ),
    NativeCall(
        "base64:b64encode",
        "b'deck' * n",
        "64..8192",
        "1",
        "0",
        "all of it in one C call",
        "binascii.b2a_base64",
    ),
]
"""What is audited."""
