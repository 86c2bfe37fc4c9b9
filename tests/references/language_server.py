#!/usr/bin/env python3
"""Holds the language server against the published types of the protocol.

usage: language_server.py PROGRAM RECORD [--break]

PROGRAM serve is driven through a full session as three editors would drive it, with the capabilities that they
announce: an old Neovim (pushed diagnostics, UTF-16, hardly anything else), Emacs, VS Code, and a new Neovim, to whose
capabilities diagnostics that are asked for are added. Every answer is read with the types of lsprotocol, which refuses
what does not fit; warnings of pytest-lsp about breaches of the specification are errors. All that the server sends is
written to RECORD, one message a line with the method that it belongs to, for `language_server.mjs`.

With --break the numbers of lines are turned into words on their way, and every session has to fail.

References: PyPI packages `lsprotocol` (types) and `pytest-lsp` (client, capabilities of real editors).
"""

import asyncio
import json
import logging
import pathlib
import sys
import tempfile
import warnings

CLIENTS = ["neovim@v0.6.1", "emacs@v29.1", "visual_studio_code@v1.65.2", "neovim@v0.11.0"]
SECONDS = 120

PAGE = r"""\documentclass{article}
\newcommand{\strain}[1]{E_{#1}}
% indexwise: i j k l run from 1 to 3; i j k l are cartesian; S_{ij} is symmetric
% indexwise: allow index-thrice here
\begin{document}
Die Schale 𝔸 é:
\begin{equation}\label{eq:work}
  W = S_{ij} \strain{ij}
\end{equation}
and from \eqref{eq:work} follows
\begin{align}\label{eq:chain}
  P &= S_{ij} \partial_i v_j \\
    &= S_{ji} \partial_j v_i
\end{align}
but not $A_i = B^j C_{ij} + D_i + E_k$, nor \[ T_{ij} = S_{ij} + w_ \]
\end{document}
"""

NOTE = """conventions
  i j k l m run from 1 to 3
  i j k l m are cartesian
  u_i v_i are vectors

  q_i = epsilon_ijk epsilon_klm u_j v_l u_m
      = u_j v_i u_j + u_j v_j u_i
"""


def frames(data):
    """The messages in a buffer, and the rest of it."""
    found = []
    while True:
        head, mark, rest = data.partition(b"\r\n\r\n")
        if not mark:
            return found, data
        length = int(head.decode().split("Content-Length:")[1].split("\r\n")[0])
        if len(rest) < length:
            return found, data
        found.append(json.loads(rest[:length]))
        data = rest[length:]


def spoilt(value):
    """The value with words for the numbers of lines."""
    if isinstance(value, dict):
        return {key: "three" if key == "line" else spoilt(one) for key, one in value.items()}
    return [spoilt(one) for one in value] if isinstance(value, list) else value


async def between(record, spoils, command):
    """Runs the server, and writes down what it sends with the method that it belongs to."""
    server = await asyncio.create_subprocess_exec(*command, stdin=asyncio.subprocess.PIPE, stdout=asyncio.subprocess.PIPE)
    loop = asyncio.get_running_loop()
    reader = asyncio.StreamReader()
    await loop.connect_read_pipe(lambda: asyncio.StreamReaderProtocol(reader), sys.stdin)
    asked = {}

    async def inwards():
        data = b""
        while piece := await reader.read(1 << 16):
            found, data = frames(data + piece)
            for message in found:
                if "id" in message and "method" in message:
                    asked[message["id"]] = message["method"]
            server.stdin.write(piece)
            await server.stdin.drain()
        server.stdin.close()

    async def outwards():
        data = b""
        with open(record, "a", encoding="utf-8") as out:
            while piece := await server.stdout.read(1 << 16):
                found, data = frames(data + piece)
                for message in found:
                    own = message.get("method")
                    kind = own or asked.get(message.get("id"))
                    out.write(json.dumps({"own": own is not None, "method": kind, "message": message}) + "\n")
                    message = spoilt(message) if spoils else message
                    body = json.dumps(message).encode()
                    sys.stdout.buffer.write(b"Content-Length: %d\r\n\r\n" % len(body) + body)
                sys.stdout.buffer.flush()

    carrier = asyncio.create_task(inwards())
    await outwards()
    carrier.cancel()
    return await server.wait()


class Session:
    """A session of one editor in a folder."""

    def __init__(self, client, types, encoding):
        self.client, self.types, self.encoding = client, types, encoding
        self.texts, self.answers = {}, 0

    def open(self, uri, language, text):
        """Opens a text."""
        self.texts[uri] = text
        item = self.types.TextDocumentItem(uri=uri, language_id=language, version=1, text=text)
        self.client.text_document_did_open(self.types.DidOpenTextDocumentParams(text_document=item))

    def position(self, text, offset):
        """The position of an offset in scalars."""
        lines = text[:offset].split("\n")
        column = lines[-1]
        units = {"utf-8": len(column.encode()), "utf-16": len(column.encode("utf-16-le")) // 2, "utf-32": len(column)}
        return self.types.Position(line=len(lines) - 1, character=units[self.encoding])

    async def ask(self, name, kind, uri, **more):
        """Asks about a text; the answer has the type that it should have, or this fails."""
        params = getattr(self.types, kind)(text_document=self.types.TextDocumentIdentifier(uri=uri), **more)
        answer = await getattr(self.client, f"{name}_async")(params)
        self.answers += answer is not None and answer != []
        return answer

    async def everywhere(self, uri):
        """Asks everything at many places of a text."""
        types, text = self.types, self.texts[uri]
        for offset in range(0, len(text), 3):
            at = self.position(text, offset)
            await self.ask("text_document_hover", "HoverParams", uri, position=at)
            await self.ask("text_document_document_highlight", "DocumentHighlightParams", uri, position=at)
            await self.ask("text_document_definition", "DefinitionParams", uri, position=at)
            await self.ask("text_document_completion", "CompletionParams", uri, position=at)
            context = types.ReferenceContext(include_declaration=True)
            await self.ask("text_document_references", "ReferenceParams", uri, position=at, context=context)
            span = types.Range(start=at, end=at)
            context = types.CodeActionContext(diagnostics=[])
            await self.ask("text_document_code_action", "CodeActionParams", uri, range=span, context=context)
            for name, kind, more in [
                ("text_document_prepare_rename", "PrepareRenameParams", {}),
                ("text_document_rename", "RenameParams", {"new_name": "z"}),
            ]:
                try:
                    await self.ask(name, kind, uri, position=at, **more)
                except Exception as error:
                    if getattr(error, "code", None) != -32803:
                        raise

    async def whole(self, uri):
        """Asks what is asked about a whole text."""
        types, text = self.types, self.texts[uri]
        whole = types.Range(start=self.position(text, 0), end=self.position(text, len(text)))
        assert await self.ask("text_document_semantic_tokens_full", "SemanticTokensParams", uri)
        await self.ask("text_document_semantic_tokens_range", "SemanticTokensRangeParams", uri, range=whole)
        await self.ask("text_document_inlay_hint", "InlayHintParams", uri, range=whole)
        await self.ask("text_document_code_lens", "CodeLensParams", uri)
        await self.ask("text_document_document_symbol", "DocumentSymbolParams", uri)
        await self.ask("text_document_folding_range", "FoldingRangeParams", uri)
        places = [self.position(text, at) for at in range(0, len(text), 40)]
        await self.ask("text_document_selection_range", "SelectionRangeParams", uri, positions=places)
        await self.client.workspace_symbol_async(types.WorkspaceSymbolParams(query=""))

    async def commands(self, uri):
        """Has every command run."""
        text, offered = self.texts[uri], self.offered.execute_command_provider.commands
        at = self.position(text, text.index("S_{ij} \\strain") + 3)
        place = {"textDocument": {"uri": uri}, "position": {"line": at.line, "character": at.character}}
        for command in offered:
            if command == "indexwise.apply":
                continue
            argument = {"rule": "index-thrice"} if command == "indexwise.explain" else place
            params = self.types.ExecuteCommandParams(command=command, arguments=[argument])
            assert await self.client.workspace_execute_command_async(params), command


async def session(name, program, record, spoils):
    """A full session as one editor has it."""
    import pytest_lsp
    from lsprotocol import types

    capabilities = pytest_lsp.client_capabilities(name)
    pulls = name == CLIENTS[-1]
    if pulls:
        capabilities.text_document.diagnostic = types.DiagnosticClientCapabilities(related_document_support=True)
    client = pytest_lsp.make_test_lsp_client()
    client.set_configuration({"indexwise": {"inlayHints": True, "steps": "auto"}})
    edits = []

    # What the library has no answer for.
    for method in [
        types.CLIENT_REGISTER_CAPABILITY,
        types.WORKSPACE_CODE_LENS_REFRESH,
        types.WORKSPACE_INLAY_HINT_REFRESH,
    ]:
        client.feature(method)(lambda params: None)

    @client.feature(types.WORKSPACE_APPLY_EDIT)
    def apply(params):
        edits.append(params)
        return types.ApplyWorkspaceEditResult(applied=True)

    between_us = [sys.executable, __file__, "--between", record, str(int(spoils)), program, "serve"]
    await client.start_io(*between_us)
    with tempfile.TemporaryDirectory() as folder:
        root = pathlib.Path(folder).resolve()
        answer = await client.initialize_session(
            types.InitializeParams(capabilities=capabilities, root_uri=root.as_uri(), process_id=None)
        )
        one = Session(client, types, (answer.capabilities.position_encoding or "utf-16"))
        one.offered = answer.capabilities
        page, note = (root / "shell.tex").as_uri(), (root / "notes.inote").as_uri()
        one.open(page, "latex", PAGE)
        one.open(note, "indexwise-note", NOTE)
        if pulls:
            report = await one.ask("text_document_diagnostic", "DocumentDiagnosticParams", page)
            assert report.items, "no diagnostics were given"
            params = types.WorkspaceDiagnosticParams(previous_result_ids=[])
            assert (await client.workspace_diagnostic_async(params)).items
        else:
            while not (client.diagnostics.get(page) and client.diagnostics.get(note)):
                await client.wait_for_notification("textDocument/publishDiagnostics")
        for uri in [page, note]:
            await one.everywhere(uri)
            await one.whole(uri)
        await one.commands(page)
        assert one.answers > 100, f"only {one.answers} answers"
        await client.shutdown_session()
    return one.answers


async def main(program, record, spoils):
    """Runs all sessions."""
    warnings.simplefilter("error")
    # What the interpreter says of the libraries themselves is no concern of ours.
    warnings.filterwarnings("ignore", category=DeprecationWarning)
    warnings.filterwarnings("ignore", category=ResourceWarning)
    if spoils:
        # The library tells at length of every message that it refuses.
        logging.disable(logging.CRITICAL)
    pathlib.Path(record).write_text("", encoding="utf-8")
    wrong = 0
    for name in CLIENTS:
        try:
            answers = await asyncio.wait_for(session(name, program, record, spoils), SECONDS)
            print(f"{name}: {answers} answers of the right types")
            wrong += spoils
        except Exception as error:
            told = " ".join(f"{type(error).__name__}: {error}".split())[:300]
            print(f"{name}: {'refused, as it should be' if spoils else told}")
            wrong += not spoils
    return 1 if wrong else 0


if __name__ == "__main__":
    if sys.argv[1] == "--between":
        sys.exit(asyncio.run(between(sys.argv[2], sys.argv[3] == "1", sys.argv[4:])))
    sys.exit(asyncio.run(main(sys.argv[1], sys.argv[2], "--break" in sys.argv)))
