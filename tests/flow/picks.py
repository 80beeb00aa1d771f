"""A hundred functions of networkx and the standard library with loops in them, each with a call.

Picked by their arguments alone: what can be called with plain numbers, texts, lists, dictionaries
and small graphs, from as many modules as possible. The second part of each entry is an expression
that gives the arguments.
"""

from __future__ import annotations

import importlib
import inspect
import random
from collections.abc import Callable
from typing import Any

PICKS = (
    # standard library: numbers and statistics
    ("statistics:covariance", "[1.0, 2.5, 3.0, 7.0], [2.0, 1.0, 0.0, 4.0]"),
    ("statistics:linear_regression", "[1.0, 2.5, 3.0, 7.0], [2.0, 1.0, 0.0, 4.0]"),
    ("statistics:fmean", "[1.0, 2.0, 4.0], [3.0, 1.0, 2.0]"),
    ("statistics:multimode", "list('abracadabra')"),
    ("statistics:quantiles", "[3.0, 1.0, 4.0, 1.0, 5.0], n=4"),
    ("statistics:harmonic_mean", "[40.0, 60.0, 50.0]"),
    ("statistics:_sum", "[1, 2, 5, 9]"),
    ("statistics:NormalDist.samples", "statistics.NormalDist(), 7"),
    ("statistics:NormalDist.quantiles", "statistics.NormalDist(), 5"),
    ("random:Random.shuffle", "random.Random(1), list(range(9))"),
    ("random:Random.choices", "random.Random(1), list(range(9)), k=5"),
    ("random:Random.sample", "random.Random(1), list(range(50)), 6"),
    ("random:Random.binomialvariate", "random.Random(1), 4, 0.5"),
    ("heapq:_heapify_max", "[5, 2, 8, 1, 9, 3]"),
    ("heapq:nsmallest", "3, [5, 2, 8, 1, 9, 3]"),
    ("heapq:merge", "[1, 4, 9], [2, 3, 10]"),
    ("colorsys:rgb_to_hsv", "0.2, 0.4, 0.6"),
    # standard library: texts
    ("textwrap:indent", "'one\\ntwo\\nthree\\n', '  '"),
    ("textwrap:dedent", "'  one\\n  two\\n    three\\n'"),
    ("textwrap:TextWrapper._fix_sentence_endings", "textwrap.TextWrapper(), ['A.', ' ', 'B']"),
    ("base64:b85decode", "base64.b85encode(b'ferry line')"),
    ("base64:a85decode", "base64.a85encode(b'ferry line')"),
    ("base64:b32encode", "b'planning office'"),
    ("base64:b32decode", "base64.b32encode(b'planning office')"),
    ("base64:encodebytes", "bytes(200)"),
    (
        "base64:_85encode",
        "b'ferry line', [bytes((i,)) for i in range(33, 118)], "
        "[bytes((i, j)) for i in range(33, 118) for j in range(33, 118)], False, True, False",
    ),
    ("calendar:Calendar.iterweekdays", "calendar.Calendar()"),
    ("calendar:Calendar.itermonthdates", "calendar.Calendar(), 2026, 2"),
    ("calendar:Calendar.itermonthdays2", "calendar.Calendar(), 2026, 2"),
    ("calendar:Calendar.monthdayscalendar", "calendar.Calendar(), 2026, 2"),
    ("calendar:Calendar.yeardayscalendar", "calendar.Calendar(), 2026"),
    ("calendar:TextCalendar.formatweekheader", "calendar.TextCalendar(), 3"),
    ("calendar:TextCalendar.formatmonth", "calendar.TextCalendar(), 2026, 2"),
    ("calendar:TextCalendar.formatyear", "calendar.TextCalendar(), 2026"),
    ("difflib:_mdiff", "['a', 'b'], ['a', 'c']"),
    (
        "difflib:SequenceMatcher.get_matching_blocks",
        "difflib.SequenceMatcher(None, 'abxcd', 'abcd')",
    ),
    ("difflib:SequenceMatcher.find_longest_match", "difflib.SequenceMatcher(None, 'abcd', 'bcde')"),
    ("difflib:get_close_matches", "'ardal', ['arda', 'bremnes', 'ardan']"),
    ("difflib:context_diff", "['a\\n', 'b\\n'], ['a\\n', 'c\\n']"),
    ("encodings.punycode:segregate", "'bücher'"),
    ("encodings.punycode:punycode_encode", "'bücher'"),
    ("posixpath:commonpath", "['/a/b/c', '/a/b/d', '/a/b']"),
    ("posixpath:normpath", "'/a/./b/../c'"),
    ("ntpath:commonpath", "['C:/a/b', 'C:/a/c']"),
    ("email.base64mime:body_encode", "bytes(100)"),
    ("email.quoprimime:header_length", "b'caf\\xe9 au lait'"),
    ("email.quoprimime:body_length", "b'caf\\xe9 au lait'"),
    ("email.utils:quote", "'plain'"),
    ("urllib.parse:parse_qsl", "'a=1&b=2&c=3'"),
    ("urllib.parse:unquote_to_bytes", "'a%20b%21c'"),
    ("fnmatch:translate", "'*.py[co]'"),
    ("gettext:_expand_lang", "'nb_NO.UTF-8@bokmal'"),
    ("stringprep:map_table_b3", "'A'"),
    ("shlex:join", "['a', 'b c', 'd']"),
    ("string:capwords", "'a b c'"),
    ("csv:Sniffer._guess_delimiter", "csv.Sniffer(), 'a,b\\nc,d\\n', None"),
    ("pprint:_recursion", "[]"),
    # standard library: code and data
    ("dis:findlinestarts", "compile('a = 1\\nb = 2\\n', 'x', 'exec')"),
    ("dis:findlabels", "compile('for i in x: pass', 'x', 'exec').co_code"),
    ("inspect:cleandoc", "'One.\\n\\n    Two\\n    three\\n'"),
    ("inspect:getblock", "['def f():\\n', '    return 1\\n']"),
    ("ast:iter_child_nodes", "ast.parse('a + b')"),
    ("ast:walk", "ast.parse('a + b')"),
    ("functools:_compose_mro", "list, [dict, set]"),
    ("collections:Counter.subtract", "collections.Counter('abc'), collections.Counter('abd')"),
    ("collections:Counter.__add__", "collections.Counter('aab'), collections.Counter('abd')"),
    ("collections:Counter.__sub__", "collections.Counter('aab'), collections.Counter('abd')"),
    ("collections:Counter._keep_positive", "collections.Counter('aab')"),
    ("graphlib:TopologicalSorter.prepare", "graphlib.TopologicalSorter({1: [2], 2: [3]})"),
    ("ipaddress:_count_righthand_zero_bits", "40, 32"),
    ("ipaddress:collapse_addresses", "[ipaddress.ip_network('10.0.0.0/25')]"),
    ("tokenize:_combinations", "'b', 'r', 'f'"),
    ("reprlib:Repr.repr_tuple", "reprlib.Repr(), (1, 2, 3), 2"),
    ("copy:_deepcopy_list", "[1, 2, 3], {}"),
    # networkx
    ("networkx.generators.classic:circulant_graph", "9, [1, 2]"),
    ("networkx.generators.classic:barbell_graph", "4, 2"),
    ("networkx.generators.classic:star_graph", "(4, list(range(5)))"),
    ("networkx.generators.lattice:triangular_lattice_graph", "3, 4"),
    ("networkx.generators.lattice:hexagonal_lattice_graph", "2, 3"),
    ("networkx.generators.lattice:grid_2d_graph", "(3, range(3)), (4, range(4))"),
    ("networkx.generators.community:caveman_graph", "3, 4"),
    ("networkx.generators.community:connected_caveman_graph", "3, 4"),
    ("networkx.generators.community:ring_of_cliques", "3, 4"),
    ("networkx.generators.expanders:margulis_gabber_galil_graph", "3"),
    ("networkx.generators.expanders:chordal_cycle_graph", "7"),
    ("networkx.generators.sudoku:sudoku_graph", "2"),
    ("networkx.generators.degree_seq:_to_stublist", "[1, 2, 3]"),
    ("networkx.algorithms.threshold:triangles", "list('ddid')"),
    ("networkx.algorithms.threshold:triangle_sequence", "list('didd')"),
    ("networkx.algorithms.threshold:degree_sequence", "list('didd')"),
    ("networkx.algorithms.threshold:betweenness_sequence", "list('didd')"),
    ("networkx.algorithms.threshold:shortest_path_length", "list('didd'), 1"),
    ("networkx.algorithms.graphical:is_multigraphical", "[1, 2, 3]"),
    ("networkx.algorithms.matching:matching_dict_to_set", "{1: 2, 2: 1}"),
    ("networkx.algorithms.centrality.degree_alg:degree_centrality", "networkx.path_graph(5)"),
    (
        "networkx.algorithms.shortest_paths.dense:floyd_warshall_predecessor_and_distance",
        "networkx.path_graph(5)",
    ),
    ("networkx.algorithms.tournament:random_tournament", "5, random.Random(3)"),
    ("networkx.algorithms.operators.unary:complement", "networkx.path_graph(5)"),
    ("networkx.utils.random_sequence:cumulative_distribution", "[1.0, 2.0, 3.0]"),
    ("networkx.utils.misc:groups", "{'a': 1, 'b': 2, 'c': 1}"),
)


def function_of(place: str) -> Callable[..., Any] | None:
    """Give the Python function of a pick, None where this version has none."""
    module, _, name = place.partition(":")
    found: Any = importlib.import_module(module)
    for part in name.split("."):
        found = inspect.getattr_static(found, part, None)
    if isinstance(found, classmethod | staticmethod):
        found = found.__func__
    found = getattr(found, "orig_func", found)
    found = inspect.unwrap(found) if callable(found) else None
    return found if inspect.isfunction(found) else None


def arguments_of(place: str, text: str) -> tuple[tuple[Any, ...], dict[str, Any]]:
    """Give the arguments of a pick's call."""
    module = place.partition(":")[0]
    import networkx

    space: dict[str, Any] = {
        "networkx": networkx,
        "random": random,
        "_": lambda *args, **kwargs: (args, kwargs),
        module.partition(".")[0]: importlib.import_module(module.partition(".")[0]),
    }
    made: tuple[tuple[Any, ...], dict[str, Any]] = eval(f"_({text})", space)
    return made
