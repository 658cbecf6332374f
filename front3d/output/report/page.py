"""HTML as text: every word is escaped unless it was made here; one page without references."""

import base64
import html
import re
from collections.abc import Iterable, Sequence
from typing import Any


class Markup(str):
    """Text that is HTML already."""

    __slots__ = ()


def tag(name: str, *children: Any, **attributes: str) -> Markup:
    """An element; children that are no Markup are escaped; `class_` stands for class."""
    words = "".join(
        f' {key.rstrip("_").replace("_", "-")}="{html.escape(value)}"'
        for key, value in attributes.items()
    )
    return Markup(f"<{name}{words}>{join(children)}</{name}>")


def join(children: Iterable[Any]) -> Markup:
    """Children one after the other."""
    return Markup("".join(c if isinstance(c, Markup) else html.escape(str(c)) for c in children))


def table(
    head: Sequence[Any], rows: Iterable[Sequence[Any]], *, numeric: bool = True, kind: str = ""
) -> Markup:
    """A table; `numeric` ones are set flush right from the second column on."""
    lines = join(tag("tr", *(tag("td", cell) for cell in row)) for row in rows)
    classes = f"{'numbers' if numeric else 'words'} {kind}".strip()
    return tag(
        "div",
        tag(
            "table",
            tag("thead", tag("tr", *(tag("th", cell) for cell in head))),
            tag("tbody", lines),
            class_=classes,
        ),
        class_="wide",
    )


def pairs(rows: Iterable[tuple[Any, Any]]) -> Markup:
    """Names with what stands for them."""
    return tag(
        "table",
        tag("tbody", *(tag("tr", tag("th", name), tag("td", value)) for name, value in rows)),
        class_="pairs",
    )


def section(title: str, *children: Any, name: str) -> Markup:
    return tag("section", tag("h2", title), *children, id=name)


def figure(picture: Markup, caption: str) -> Markup:
    return tag("figure", picture, tag("figcaption", caption))


def png_image(content: bytes, words: str) -> Markup:
    """A picture inside the page."""
    data = base64.b64encode(content).decode()
    return Markup(f'<img alt="{html.escape(words)}" src="data:image/png;base64,{data}">')


def svg_image(content: bytes, number: int, words: str) -> Markup:
    """A drawing inside the page; its inner names get a prefix, so that no two share one."""
    text = content.decode()
    text = text[text.index("<svg") :]
    text = re.sub(r"<metadata>.*?</metadata>", "", text, flags=re.DOTALL)
    text = re.sub(r' xmlns(:\w+)?="[^"]*"', "", text)  # known to HTML without
    prefix = f"drawing{number}-"
    text = re.sub(r'\bid="', f'id="{prefix}', text)
    text = re.sub(r'href="#', f'href="#{prefix}', text)
    text = re.sub(r"url\(#", f"url(#{prefix}", text)
    size = re.search(r'viewBox="0 0 ([\d.]+) ([\d.]+)"', text)
    text = re.sub(r'(<svg[^>]*?) (?:width|height)="[^"]*"', r"\1", text, count=1)
    text = re.sub(r'(<svg[^>]*?) (?:width|height)="[^"]*"', r"\1", text, count=1)
    if size is None:
        raise ValueError("a drawing without a viewBox")
    return Markup(text.replace("<svg", f'<svg role="img" aria-label="{html.escape(words)}"', 1))


def page(title: str, body: Markup) -> str:
    return (
        '<!DOCTYPE html>\n<html lang="en">\n<head>\n<meta charset="utf-8">\n'
        '<meta name="viewport" content="width=device-width, initial-scale=1">\n'
        f"<title>{html.escape(title)}</title>\n<style>{_STYLE}</style>\n</head>\n"
        f"<body>\n<main>{body}</main>\n</body>\n</html>\n"
    )


_STYLE = """
:root { --ink: #222222; --muted: #555555; --line: #cfd5da; --tint: #f3f5f7; --strong: #00507d; }
* { box-sizing: border-box; }
body { margin: 0; color: var(--ink); background: white;
  font: 16px/1.5 "Liberation Sans", Arial, Helvetica, "DejaVu Sans", sans-serif; }
main { max-width: 60rem; margin: 0 auto; padding: 1.5rem 1.25rem 3rem; }
h1 { font-size: 1.6rem; line-height: 1.25; margin: 0 0 .2rem; overflow-wrap: anywhere; }
h2 { font-size: 1.2rem; margin: 2.2rem 0 .6rem; padding-bottom: .2rem;
  border-bottom: 2px solid var(--strong); color: var(--strong); }
h3 { font-size: 1rem; margin: 1.2rem 0 .4rem; }
p { margin: .5rem 0; }
.sub, figcaption, .small { color: var(--muted); font-size: .9rem; }
.answer { font-size: 1.35rem; line-height: 1.4; margin: .6rem 0; padding: .8rem 1rem;
  background: var(--tint); border-left: 5px solid var(--strong); }
.answer strong { white-space: nowrap; }
.caution { border: 1px solid var(--line); padding: .6rem .9rem; margin: .8rem 0; }
ul.warnings { margin: .5rem 0; padding: .6rem .9rem .6rem 2rem; border-left: 5px solid #d55e00;
  background: #fdf3ec; }
.wide { overflow-x: auto; margin: .6rem 0; }
table { border-collapse: collapse; font-size: .88rem; font-variant-numeric: tabular-nums; }
th, td { padding: .25rem .6rem; border-bottom: 1px solid var(--line); text-align: left;
  vertical-align: top; }
thead th { border-bottom: 2px solid var(--ink); vertical-align: bottom; }
table.numbers td:not(:first-child), table.numbers th:not(:first-child) { text-align: right; }
table.numbers td { white-space: nowrap; }
table.stations { font-size: .8rem; }
table.stations th, table.stations td { padding: .12rem .45rem; }
table.pairs th { font-weight: normal; color: var(--muted); white-space: nowrap; }
table.pairs td { overflow-wrap: anywhere; }
figure { margin: 1rem 0 1.4rem; }
figure svg, figure img { width: 100%; max-width: 50rem; height: auto; display: block; }
iframe { width: 100%; height: 32rem; border: 1px solid var(--line); }
.legend { display: flex; align-items: center; gap: .6rem; font-size: .9rem; margin: .4rem 0; }
.legend span.bar { display: inline-block; width: 14rem; height: .9rem;
  border: 1px solid var(--line); }
pre { background: var(--tint); padding: .7rem .9rem; overflow-x: auto; font-size: .85rem; }
code { font-family: "Liberation Mono", "DejaVu Sans Mono", monospace; font-size: .92em; }
@media print {
  @page { size: A4; margin: 16mm 14mm;
    @bottom-right { content: counter(page) " / " counter(pages); font-size: 8pt; color: #555555; } }
  body { font-size: 10.5pt; }
  main { max-width: none; padding: 0; }
  h2 { break-after: avoid; margin-top: 1.4rem; }
  figure, .answer, .caution, ul.warnings { break-inside: avoid; }
  figure { margin: .5rem 0 .8rem; }
  figure svg, figure img { max-height: 150mm; width: auto; max-width: 152mm; margin: 0 auto; }
  figure img { max-height: 112mm; }
  h3, .small { break-after: avoid; }
  thead { display: table-header-group; }
  tr { break-inside: avoid; }
  .wide { overflow: visible; }
  table { font-size: 8.5pt; }
  table.numbers td { white-space: normal; }
  table.stations { font-size: 6.6pt; }
  table.few { font-size: 7.6pt; }
  table.stations th, table.stations td { padding: .5pt 2.5pt; }
  pre { white-space: pre-wrap; }
  .screen { display: none; }
}
"""
