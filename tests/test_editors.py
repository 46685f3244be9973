"""The set-ups of editors in the README: what can be run is run, the rest is held against what the program offers."""

import json
import os
import re
import shutil
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest
from test_serving import UNSAFE

from seqcheck import cli

ROOT = Path(__file__).parent.parent
README = (ROOT / "README.md").read_text(encoding="utf-8")
SETUPS = dict(re.findall(r"<!-- editor: (.+?) -->\n```[a-z]+\n(.*?)```\n", README, re.DOTALL))
NEOVIM = shutil.which("nvim")
LOOK = """
vim.cmd.edit("leg.dseq")
vim.wait(60000, function()
  local found = vim.diagnostic.get(0)
  return #found > 0 and found[1].code ~= "unproven"
end)
local found = {}
for _, one in ipairs(vim.diagnostic.get(0)) do
  table.insert(found, { one.code, one.lnum, one.col, one.message })
end
local client = vim.lsp.get_clients({ bufnr = 0 })[1]
local place = vim.lsp.util.make_position_params(0, client.offset_encoding)
place.position = { line = 5, character = 8 }
local hover = client:request_sync("textDocument/hover", place, 60000, 0)
print(vim.json.encode({ filetype = vim.bo.filetype, found = found, hover = hover.result.contents.value }))
vim.cmd.quit({ bang = true })
"""


def can_run() -> bool:
    """Whether there is a Neovim that has the calls of the set-up."""
    if NEOVIM is None:
        return False
    said = subprocess.run([NEOVIM, "--version"], capture_output=True, text=True, check=True).stdout
    version = re.search(r"NVIM v(\d+)\.(\d+)", said)
    return version is not None and (int(version[1]), int(version[2])) >= (0, 11)


def test_the_set_ups_are_there() -> None:
    assert SETUPS.keys() == {"neovim", "package.json", "extension.js", "helix"}


@pytest.mark.skipif(not can_run(), reason="no Neovim 0.11 or later is installed")
def test_neovim_shows_findings_and_meanings(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    program = tmp_path / "seqcheck"
    program.write_text(f'#!/bin/sh\nPYTHONPATH="{ROOT}" exec "{sys.executable}" -m seqcheck "$@"\n')
    program.chmod(0o755)
    for name in ("HOME", "XDG_CONFIG_HOME", "XDG_STATE_HOME", "XDG_DATA_HOME"):
        monkeypatch.setenv(name, str(tmp_path / "home"))
    monkeypatch.setenv("PATH", f"{tmp_path}{os.pathsep}{os.environ['PATH']}")
    Path("leg.dseq").write_text(UNSAFE)
    Path("init.lua").write_text(SETUPS["neovim"])
    Path("look.lua").write_text(LOOK)
    call = [str(NEOVIM), "--headless", "-u", "init.lua", "-S", "look.lua"]
    ran = subprocess.run(call, capture_output=True, text=True, timeout=180, check=False)
    said = json.loads((ran.stdout + ran.stderr).strip().split("\n")[-1])
    assert said["filetype"] == "dseq"
    assert said["hover"].startswith("switch A\nhigh side of leg U")
    ((code, line, column, text),) = said["found"]
    assert (code, line, column) == ("overlap", 15, 2)
    assert "P can be joined to N through A and B, for up to 1 ps" in text


def test_the_other_set_ups_call_what_there_is() -> None:
    package, helix = json.loads(SETUPS["package.json"]), tomllib.loads(SETUPS["helix"])
    (grammar,) = package["contributes"]["grammars"]
    shipped = json.loads((ROOT / "grammars" / Path(grammar["path"]).name).read_text("utf-8"))
    assert grammar["scopeName"] == shipped["scopeName"] == helix["language"][0]["scope"]
    assert f".{shipped['fileTypes'][0]}" in package["contributes"]["languages"][0]["extensions"]
    server = helix["language-server"]["seqcheck"]
    assert (server["command"], server["args"]) == ("seqcheck", ["serve"])
    assert 'command: "seqcheck", args: ["serve"]' in SETUPS["extension.js"]
    assert cli.main(["serve", "--help"]) == 0


@pytest.mark.skipif(shutil.which("node") is None, reason="node is not installed")
def test_the_extension_is_a_program_that_starts_the_server(tmp_path: Path) -> None:
    """It is run with a stand-in for the client library, which only an editor can load."""
    library = tmp_path / "node_modules" / "vscode-languageclient" / "node.js"
    library.parent.mkdir(parents=True)
    library.write_text(
        "exports.LanguageClient = class { constructor(...all) { this.all = all; }\n"
        "start() { console.log(JSON.stringify(this.all)); } stop() { console.log('stopped'); } };\n"
    )
    (tmp_path / "extension.js").write_text(SETUPS["extension.js"])
    (tmp_path / "package.json").write_text(SETUPS["package.json"])
    code = "const one = require('./'); one.activate(); one.deactivate()"
    ran = subprocess.run(["node", "-e", code], cwd=tmp_path, capture_output=True, text=True, check=True, timeout=60)
    started, stopped = ran.stdout.split("\n", 1)
    assert json.loads(started)[1] == {"command": "seqcheck", "args": ["serve"]}
    assert stopped == "stopped\n"
