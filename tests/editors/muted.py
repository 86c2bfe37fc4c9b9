#!/usr/bin/env python3
"""A language server with one thing taken out or spoilt, to show that the editors' tests can fail.

    muted.py WHAT PROGRAM ARGUMENTS...

It stands between an editor and the program, and hands everything on but one kind of message:

    diagnostics   findings are never told
    hover         there is nothing to hover over
    rename        a rename changes nothing
    actions       there are no actions
    fading        findings stay, whatever is mended
    hints         there are no inlay hints
    place         findings stand one column too far to the right
    half          a rename leaves one of its places out
    encoding      columns are counted as agreed, and the editor is told of another count

With any other word it takes out nothing.
"""

import json
import subprocess
import sys
import threading

# What is taken out, by the request whose answer becomes empty.
ASKED = {
    "hover": "textDocument/hover",
    "rename": "textDocument/rename",
    "actions": "textDocument/codeAction",
    "hints": "textDocument/inlayHint",
}


def message(stream):
    """The next message of a stream, or nothing at its end."""
    length = None
    while True:
        line = stream.readline()
        if not line:
            return None
        if line.strip() == b"":
            break
        name, _, value = line.partition(b":")
        if name.lower() == b"content-length":
            length = int(value)
    return json.loads(stream.read(length))


def halve(edit):
    """Takes the last place out of an edit, in either of its two forms."""
    for edits in edit.get("changes", {}).values():
        edits.pop()
    for document in edit.get("documentChanges", []):
        document["edits"].pop()


def send(stream, content):
    body = json.dumps(content).encode()
    stream.write(b"Content-Length: %d\r\n\r\n" % len(body) + body)
    stream.flush()


class Muting:
    """What is taken out of the messages of one session."""

    def __init__(self, what):
        self.what = what
        # The method of each request that the editor made; the last findings that there were.
        self.methods = {}
        self.stale = []

    def asked(self, content):
        if "method" in content and "id" in content:
            self.methods[content["id"]] = content["method"]

    def findings(self, found):
        """What is told instead of findings."""
        if self.what == "diagnostics":
            return []
        if self.what == "place":
            for one in found:
                for end in one["range"].values():
                    end["character"] += 1
        self.stale = found or self.stale
        return self.stale if self.what == "fading" else found

    def told(self, content):
        """A message of the program as the editor gets it."""
        if content.get("method") == "textDocument/publishDiagnostics":
            content["params"]["diagnostics"] = self.findings(content["params"]["diagnostics"])
        if "method" in content or "result" not in content:
            return content
        method, result = self.methods.get(content["id"]), content["result"]
        if method == ASKED.get(self.what):
            content["result"] = None
        elif method == "textDocument/diagnostic" and self.what in ("diagnostics", "place", "fading"):
            # A report that says "as before" would be one more way of telling.
            content["result"] = {"kind": "full", "items": self.findings(result.get("items", []))}
        elif method == "textDocument/rename" and self.what == "half":
            halve(result)
        elif method == "initialize" and self.what == "encoding":
            agreed = result["capabilities"]["positionEncoding"]
            result["capabilities"]["positionEncoding"] = "utf-16" if agreed == "utf-8" else "utf-32"
        return content


def main():
    muting = Muting(sys.argv[1])
    program = subprocess.Popen(sys.argv[2:], stdin=subprocess.PIPE, stdout=subprocess.PIPE)

    def forward():
        while (content := message(sys.stdin.buffer)) is not None:
            muting.asked(content)
            send(program.stdin, content)
        program.stdin.close()

    threading.Thread(target=forward, daemon=True).start()
    while (content := message(program.stdout)) is not None:
        send(sys.stdout.buffer, muting.told(content))
    sys.exit(program.wait())


if __name__ == "__main__":
    main()
