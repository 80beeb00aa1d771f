"""Picked calls of the standard library that read and write text."""

# mypy: ignore-errors

from __future__ import annotations

from typing import Any

from programs.picked import PORTS, TEXT, picked


@picked
def difflib_ratio() -> Any:
    from difflib import SequenceMatcher

    return SequenceMatcher(None, TEXT[:90], TEXT[20:120], autojunk=False).ratio()


@picked
def difflib_unified() -> Any:
    from difflib import get_close_matches, ndiff, unified_diff

    old, new = TEXT.split(), TEXT.replace("sailing", "crossing").split()
    return (
        list(unified_diff(old, new)),
        list(ndiff(old[:9], new[:9])),
        get_close_matches("Bremness", PORTS),
    )


@picked
def textwrap_fill() -> Any:
    import textwrap

    return textwrap.fill(TEXT, 31), textwrap.dedent("  a\n   b\n"), textwrap.shorten(TEXT, 40)


@picked
def json_decoding_in_python() -> Any:
    from json import decoder, scanner

    plain = decoder.JSONDecoder()
    plain.parse_string = decoder.py_scanstring
    plain.scan_once = scanner.py_make_scanner(plain)
    return plain.decode('{"a": [1, 2.5, {"b": "x\\u00e9\\n"}], "c": null, "d": [true, false, "y"]}')


@picked
def json_decoding_faults() -> Any:
    from json import decoder, scanner

    plain = decoder.JSONDecoder()
    plain.scan_once = scanner.py_make_scanner(plain)
    said = []
    for text in ('{"a": }', "[1, 2", "{,}", '"x', "1 2"):
        try:
            plain.decode(text)
        except decoder.JSONDecodeError as fault:
            said.append(str(fault))
    return said


@picked
def json_encoding_in_python() -> Any:
    import json

    return json.dumps({"b": [1, {"c": PORTS}], "a": 2.5, "n": None}, indent=2, sort_keys=True)


@picked
def string_template() -> Any:
    import string

    formatter = string.Formatter()
    return (
        string.Template("$port at ${hour}h").substitute(port="Eide", hour=7),
        string.Template("$a $$ $b").safe_substitute(a=1),
        formatter.format("{0:>5}|{name!r}|{1[0]}", 3, [4], name="x"),
        string.capwords("a few words"),
    )


@picked
def re_compiling() -> Any:
    import re

    re.purge()
    pattern = re.compile(r"(?P<port>[A-Z]\w+)\s+(?:at|by)\s+(\d{1,2})(?=h|:)|(?<!x)y*?z{2,}")
    return pattern.groups, pattern.findall("Eide at 7h, Corran by 12:30")


@picked
def re_escape_and_scanner() -> Any:
    import re

    scanner = re.Scanner(
        [(r"\d+", lambda s, t: int(t)), (r"[a-z]+", lambda s, t: t), (r"\s+", None)]
    )
    return scanner.scan("12 ab 3"), re.escape("a.b"), re.sub("a", lambda m: m[0] * 2, "banana")


@picked
def ast_walking() -> Any:
    import ast

    tree = ast.parse("def f(a, b=1):\n    return [x + a for x in b if x > 2] or {1: 'q'}\n")
    names = [type(node).__name__ for node in ast.walk(tree)]
    return names, ast.unparse(tree), ast.literal_eval("[1, (2, {'a': -3})]")


@picked
def ast_transforming() -> Any:
    import ast

    class Doubling(ast.NodeTransformer):
        def visit_Constant(self, node: ast.Constant) -> ast.AST:
            return ast.Constant(node.value * 2)

    tree = Doubling().visit(ast.parse("a = 1 + 2 * b"))
    return ast.dump(tree)


@picked
def argparse_parsing() -> Any:
    import argparse

    parser = argparse.ArgumentParser(prog="berths")
    parser.add_argument("port", choices=PORTS)
    parser.add_argument("--length", type=int, default=3)
    parser.add_argument("-v", action="count", default=0)
    some = parser.add_mutually_exclusive_group()
    some.add_argument("--day", action="store_true")
    some.add_argument("--night", action="store_true")
    found = parser.parse_args(["Eide", "--length", "12", "-vv", "--day"])
    return sorted(vars(found).items()), parser.format_usage()


@picked
def argparse_refusing() -> Any:
    import argparse
    import contextlib
    import io

    parser = argparse.ArgumentParser(prog="berths")
    parser.add_argument("--length", type=int)
    with contextlib.redirect_stderr(io.StringIO()) as said:
        try:
            parser.parse_args(["--length", "x"])
        except SystemExit as end:
            return end.code, said.getvalue()
    return None


@picked
def csv_reading() -> Any:
    import csv
    import io

    out = io.StringIO()
    writer = csv.DictWriter(out, ["port", "metres"])
    writer.writeheader()
    writer.writerows({"port": p, "metres": len(p)} for p in PORTS)
    rows = list(csv.DictReader(io.StringIO(out.getvalue())))
    return rows, csv.Sniffer().sniff("a;b\n1;2\n3;4\n").delimiter


@picked
def configparser_reading() -> Any:
    import configparser

    parser = configparser.ConfigParser()
    parser.read_string("[line]\nvessel = Brage\ndepth: 4\nname = %(vessel)s II\n[empty]\n# no\n")
    return parser["line"]["name"], parser.getint("line", "depth"), parser.has_option("empty", "x")


@picked
def urllib_parsing() -> Any:
    from urllib import parse

    url = "https://user@ferry.example:8443/a/b;p?q=1&r=%C3%A5#top"
    return (
        parse.urlsplit(url),
        parse.urljoin(url, "../c?d"),
        parse.parse_qs("a=1&a=2&b=%20"),
        parse.quote("å b/c"),
        parse.unquote("%C3%A5+b"),
        parse.urlencode({"a": [1, 2], "b": "x y"}, doseq=True),
    )


@picked
def strptime() -> Any:
    import datetime

    return datetime.datetime.strptime("2026-03-04 05:06", "%Y-%m-%d %H:%M")


@picked
def shlex_and_fnmatch() -> Any:
    import fnmatch
    import shlex

    return (
        shlex.split("a 'b c' --d=\"e f\" # no", comments=True),
        shlex.join(["a b", "c"]),
        [p for p in PORTS if fnmatch.fnmatchcase(p, "*[ae]?")],
    )


@picked
def html_and_xml() -> Any:
    import html
    from html.parser import HTMLParser
    from xml.etree import ElementPath, ElementTree

    class Tags(HTMLParser):
        def __init__(self) -> None:
            super().__init__()
            self.seen: list[Any] = []

        def handle_starttag(self, tag: str, attrs: Any) -> None:
            self.seen.append((tag, attrs))

    tags = Tags()
    tags.feed("<p class='a'>x &amp; <br/><b>y</b></p>")
    root = ElementTree.fromstring("<a><b n='1'/><c><b n='2'/></c></a>")
    return (
        tags.seen,
        html.unescape("&lt;&eacute;"),
        [b.get("n") for b in ElementPath.findall(root, ".//b")],
    )


@picked
def calendar_and_locale() -> Any:
    import calendar

    return calendar.TextCalendar().formatmonth(2026, 12), calendar.monthrange(2024, 2)


@picked
def pprint_and_reprlib() -> Any:
    import pprint
    import reprlib

    return pprint.pformat({p: list(range(len(p))) for p in PORTS}, width=30), reprlib.repr(
        list(range(50))
    )


@picked
def ipaddress_networks() -> Any:
    import ipaddress

    net = ipaddress.ip_network("10.1.0.0/29")
    return (
        list(net.hosts()),
        net.overlaps(ipaddress.ip_network("10.1.0.4/30")),
        str(ipaddress.ip_address("2001:db8::1").reverse_pointer),
    )


@picked
def tokenizing() -> Any:
    import io
    import tokenize

    source = "def f(a):\n    return a + 1  # x\n"
    return [token.string for token in tokenize.generate_tokens(io.StringIO(source).readline)]


@picked
def tomllib_loading() -> Any:
    import tomllib

    return tomllib.loads('[line]\nname = "Brage"\ndays = [1, 2, {a = 1e3}]\nat = 2026-12-01\n')


@picked
def pathlibpure() -> Any:
    from pathlib import PurePosixPath

    path = PurePosixPath("/a/b/../c.tar.gz")
    return (
        path.parts,
        path.suffixes,
        path.with_name("d"),
        path.relative_to("/a"),
        [str(p) for p in path.parents],
    )


@picked
def email_parsing() -> Any:
    from email import message_from_string

    message = message_from_string("From: a@b.example\nSubject: =?utf-8?q?caf=C3=A9?=\n\nx\n")
    return message["from"], message.get_content_type(), message.get_payload()


@picked
def zip_and_base64() -> Any:
    import base64
    import quopri

    return (
        base64.b85encode(TEXT.encode())[:20],
        base64.b32decode("MZXW6==="),
        quopri.encodestring("é=".encode()),
    )
