#!/usr/bin/env python3
"""Compares where we find mathematics with where pandoc finds it.

usage: pandoc_regions.py DIRECTORY REGIONS [COMMAND ...]

REGIONS holds one JSON object a line, {"path": ..., "formulas": [body, ...]}, as the example `regions` of the crate
indexwise-grammar prints it; paths are taken from DIRECTORY. Each document is read by pandoc, and the `Math` nodes of
its tree are compared with our bodies, in order, with white space, comments and the environments that pandoc adds
taken away. Agreement is twice the common formulas over all formulas of both sides. Exit status 1 below 99 percent,
2 if nothing could be compared.

Pandoc drops the arguments of commands that it does not know, with the mathematics in them. The COMMANDs (names without
backslash) are taken out of the text before pandoc reads it, so that their arguments stay. It drops pictures too: a
formula of ours that stands in one is not counted.

Reference: pandoc (Debian package `pandoc`), its JSON tree.
"""

import concurrent.futures
import difflib
import json
import os
import re
import subprocess
import sys
import tempfile

WANTED = 0.99
SECONDS = 60
SHOWN = 100

# Pandoc neither expands macros here nor follows parts: we compare one file as it is written.
LATEX = "latex-latex_macros"
MARKDOWN = "markdown-latex_macros+tex_math_dollars+tex_math_single_backslash"

# Displays that stand bare in Markdown come out of pandoc as raw TeX.
DISPLAYS = "equation|align|alignat|flalign|gather|multline|eqnarray|displaymath|math|dmath"

PICTURE = re.compile(r"\\begin\{((?:tikz|pgf)picture|circuitikz)\}(.*?)\\end\{\1\}", re.DOTALL)

# Environments that we read and pandoc does not know, by a known one of the same shape.
KNOWN_SHAPES = {"flalign": "align", "xalignat": "alignat", "xxalignat": "alignat", "subeqnarray": "eqnarray"}


def main():
    if len(sys.argv) < 3:
        sys.exit(__doc__)
    directory, regions, *commands = sys.argv[1:]
    with open(regions, encoding="utf-8") as lines:
        documents = [json.loads(line) for line in lines if line.strip()]
    with concurrent.futures.ThreadPoolExecutor(os.cpu_count()) as pool:
        results = list(pool.map(lambda document: compare(directory, document, commands), documents))
    common = sum(result["common"] for result in results)
    total = sum(result["total"] for result in results)
    shown = 0
    for result in results:
        for line in result["lines"]:
            shown += 1
            if shown <= SHOWN:
                print(line)
    if shown > SHOWN:
        print(f"... and {shown - SHOWN} more differences")
    unread = sum(result["unread"] for result in results)
    if total == 0:
        print("nothing to compare")
        sys.exit(2)
    agreement = 2 * common / total
    print(f"{len(results) - unread} documents compared, {unread} not read by pandoc")
    print(f"{common} formulas in common of {total / 2:g}: agreement {100 * agreement:.2f} %")
    sys.exit(0 if agreement >= WANTED else 1)


def compare(directory, document, commands):
    path = os.path.join(directory, document["path"])
    latex = not path.endswith((".md", ".qmd", ".Rmd"))
    with open(path, "rb") as file:
        text = file.read().decode("utf-8", errors="replace")
    text, drawn = without(text, commands), set()
    for _name, picture in re.findall(PICTURE, text):
        drawn.update(normal(formula, latex) for formula in picture_formulas(picture))
    theirs = pandoc_formulas(text, latex)
    if theirs is None:
        return {"common": 0, "total": 0, "unread": 1, "lines": [f"{document['path']}: not read by pandoc"]}
    ours = [normal(without(formula, commands), latex) for formula in document["formulas"]]
    theirs = [normal(formula, latex) for formula in theirs]
    lines, common, uncounted = [], 0, 0
    matcher = difflib.SequenceMatcher(None, ours, theirs, autojunk=False)
    for kind, a, b, c, d in matcher.get_opcodes():
        if kind == "equal":
            common += b - a
            continue
        extra = [formula for formula in ours[a:b] if formula not in drawn]
        uncounted += b - a - len(extra)
        lines += [f"{document['path']}: ours   {formula[:160]}" for formula in extra]
        lines += [f"{document['path']}: pandoc {formula[:160]}" for formula in theirs[c:d]]
    return {"common": common, "total": len(ours) + len(theirs) - uncounted, "unread": 0, "lines": lines}


def without(text, commands):
    """A text without these commands, but with their arguments in braces."""
    if not commands:
        return text
    return re.sub(r"\\(%s)\*?(\[[^\]]*\])?(?=\s*\{)" % "|".join(map(re.escape, commands)), "", text)


def picture_formulas(picture):
    return [a or b for a, b in re.findall(r"\$([^$]+)\$|\\\((.+?)\\\)", picture, re.DOTALL)]


def pandoc_formulas(text, latex):
    """The text of every `Math` node of the body, or None if pandoc cannot read the document."""
    if latex:
        names = "|".join(KNOWN_SHAPES)
        text = re.sub(
            r"\\(begin|end)\{(%s)(\*?)\}" % names,
            lambda found: "\\%s{%s%s}" % (found[1], KNOWN_SHAPES[found[2]], found[3]),
            text,
        )
    command = ["pandoc", "-f", LATEX if latex else MARKDOWN, "-t", "json"]
    # An empty folder, so that no part of the document is found.
    with tempfile.TemporaryDirectory() as empty:
        try:
            run = subprocess.run(command, input=text.encode(), capture_output=True, cwd=empty, timeout=SECONDS)
        except subprocess.TimeoutExpired:
            return None
    if run.returncode != 0:
        return None
    return list(formulas(json.loads(run.stdout)["blocks"]))


def formulas(tree):
    """The formulas of a tree, in order."""
    waiting = [tree]
    while waiting:
        node = waiting.pop()
        if isinstance(node, list):
            waiting.extend(reversed(node))
            continue
        if not isinstance(node, dict):
            continue
        content = node.get("c")
        if node.get("t") == "Math":
            yield content[1]
        elif node.get("t") in ("RawBlock", "RawInline"):
            display = re.fullmatch(r"\\begin\{((%s)\*?)\}(.*)\\end\{\1\}" % DISPLAYS, content[1].strip(), re.DOTALL)
            if display:
                yield display[3]
        else:
            waiting.append(content)


def normal(formula, latex):
    """A formula without what the two sides write differently: comments, space, the environment pandoc puts around."""
    if latex:
        formula = re.sub(r"(?<!\\)((?:\\\\)*)%[^\n]*\n?", r"\1", formula)
    formula = "".join(formula.split())
    for name in ("aligned", "gathered"):
        begin, end = "\\begin{%s}" % name, "\\end{%s}" % name
        if formula.startswith(begin) and formula.endswith(end) and formula.count(begin) == 1:
            formula = formula[len(begin) : -len(end)]
    # The number of columns of `alignat`, which pandoc leaves in.
    return re.sub(r"^\{\d+\}", "", formula)


if __name__ == "__main__":
    main()
