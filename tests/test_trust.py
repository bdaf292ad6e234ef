"""What the source can't do, by its syntax: run data as code, open a connection, start a program that another chose."""

import ast
from functools import cache
from pathlib import Path

import pytest

SRC = Path(__file__).parent.parent / "src" / "polebook"
CODE_FROM_DATA = {"pickle", "_pickle", "marshal", "shelve", "dill", "cloudpickle", "joblib", "copyreg", "yaml", "code",
                  "codeop", "runpy", "imp", "ctypes", "cffi", "zipimport"}
NETWORK = {"socket", "_socket", "ssl", "socketserver", "http", "urllib", "urllib3", "requests",
           "httpx", "aiohttp", "ftplib", "smtplib", "poplib", "imaplib", "nntplib", "telnetlib", "xmlrpc", "webbrowser",
           "wsgiref", "mailbox"}
PROGRAMS = {"subprocess", "_posixsubprocess", "multiprocessing", "concurrent", "pty", "posix", "nt", "sched"}
BUILT_IN = {"eval", "exec", "compile", "__import__", "breakpoint"}
ASKS_NOBODY = {"system", "popen", "fork", "forkpty", "startfile", "import_module", "open_connection",
               "open_unix_connection", "start_server", "start_unix_server", "create_connection", "create_server",
               "create_datagram_endpoint", "sock_connect", "create_subprocess_exec", "create_subprocess_shell",
               "subprocess_exec", "subprocess_shell", "fromfile", "tofile", "memmap", "loadtxt", "genfromtxt", "savez",
               "exec_module", "load_module", "spec_from_file_location", "FunctionType", "CodeType"}
STARTS = ("execl", "execv", "spawn", "posix_spawn")  # os.execv, os.spawnl ...

# file -> the only words with which it may start a program, as they stand in the source, and where `program` is from
STARTERS = {
    "plan/process.py": ("[sys.executable, '-P', '-c', program]", ()),
    "record/git.py": ("[program, '-C', folder(path), *_ALWAYS, *arguments]", ("shutil.which('git')",)),
}
SPELLING = ("urllib.parse", "urllib.parse.quote")  # a file's name in a link; it opens nothing
# file -> what it may import by name: the beginning of the argument as it stands in the source
IMPORTERS = {"cli/main.py": "f'polebook.cli.{name}'"}


@cache
def trees() -> dict[str, ast.AST]:
    return {path.relative_to(SRC).as_posix(): ast.parse(path.read_text(encoding="utf-8")) for path in SRC.rglob("*.py")}


def wrongs(tree: ast.AST, file: str) -> list[str]:
    """Every import and call that trust does not allow, as "line: what"."""
    found = []
    for node in ast.walk(tree):
        told = ""
        if isinstance(node, ast.Import):
            told = next((name.name for name in node.names if _barred(name.name, file)), "")
        elif isinstance(node, ast.ImportFrom):
            names = [node.module or "", *(f"{node.module}.{name.name}" for name in node.names)]
            told = next((name for name in names if _barred(name, file)), "")
            told = told or next((name.name for name in node.names if name.name in ASKS_NOBODY - {"import_module"}), "")
        elif isinstance(node, ast.Name) and node.id in BUILT_IN | {"__builtins__", "__loader__"}:
            told = node.id
        elif isinstance(node, ast.Attribute) and _attribute(node):
            told = ast.unparse(node)
        elif isinstance(node, ast.Call):
            told = _call(node, file)
        elif isinstance(node, ast.Constant) and node.value in ("__builtins__", "__import__", "__globals__"):
            told = str(node.value)
        if told:
            found.append(f"{getattr(node, 'lineno', 0)}: {told}")
    return found


def _barred(name: str, file: str) -> bool:
    root = name.partition(".")[0]
    if name in SPELLING and file == "report/markdown.py":
        return False
    return root in CODE_FROM_DATA | NETWORK | PROGRAMS and not (root == "subprocess" and file in STARTERS)


def _attribute(node: ast.Attribute) -> bool:
    """Names that are as bad in any module; `np.load` and `np.save`, which know how to unpickle."""
    owner = node.value.id if isinstance(node.value, ast.Name) else ""
    if owner in ("np", "numpy"):
        return node.attr in ("load", "save", "frompyfunc") or node.attr in ASKS_NOBODY
    if owner in ("os", "builtins", "sys"):
        return node.attr in ASKS_NOBODY | BUILT_IN or node.attr.startswith(STARTS)
    return node.attr in ASKS_NOBODY or node.attr in ("__globals__", "__subclasses__", "__code__")


def _call(node: ast.Call, file: str) -> str:
    words = {word.arg: word.value for word in node.keywords}
    told = ast.unparse(node.func)
    if "shell" in words or "allow_pickle" in words or "executable" in words or "preexec_fn" in words:
        return told
    if told in ("import_module", "Thread"):
        imports = _imports(node)
        return f"{told} of {imports}" if imports and imports != IMPORTERS.get(file) else ""
    if told.startswith("subprocess."):
        first = ast.unparse(node.args[0]) if node.args else ""
        if told not in ("subprocess.Popen", "subprocess.run") or file not in STARTERS or first != STARTERS[file][0]:
            return f"{told}({first})"
    return ""


def _programs(tree: ast.AST) -> tuple[str, ...]:
    """What is put into a name `program`."""
    return tuple(ast.unparse(node.value) for node in ast.walk(tree) if isinstance(node, ast.Assign)
                 and any(ast.unparse(one) == "program" for one in node.targets))


def _imports(node: ast.Call) -> str | None:
    """What a call imports by name, also in a thread; None for nothing, or for words that stand in the source."""
    if ast.unparse(node.func) == "import_module":
        return None if isinstance(node.args[0], ast.Constant) else ast.unparse(node.args[0])
    words = {word.arg: word.value for word in node.keywords}
    if not (isinstance(words.get("target"), ast.Name) and words["target"].id == "import_module"):
        return None
    return None if isinstance(words["args"], ast.Tuple) and all(isinstance(one, ast.Constant) for one in
                                                                words["args"].elts) else ast.unparse(words["args"])


def test_no_code_from_data_no_network_and_no_other_programs():
    assert len(trees()) > 300
    wrong = {}
    for name, tree in trees().items():
        if told := wrongs(tree, name):
            wrong[name] = told
        assert name not in STARTERS or _programs(tree) == STARTERS[name][1]
    assert wrong == {}


@pytest.mark.parametrize("text", [
    "import pickle", "from pickle import loads", "import numpy, marshal", "from concurrent.futures import Executor",
    "import urllib.request", "from urllib import request", "import socket as s", "from http import client",
    "import yaml", "eval('1')", "f = exec", "compile(x, '', 'exec')", "__import__(x)", "builtins.eval(x)",
    "import builtins; builtins.exec(x)", "os.system(x)",
    "from os import system", "os.execvp(x, y)", "os.spawnl(1)", "os.posix_spawn(x)", "os.popen(x)",
    "import subprocess", "from subprocess import run", "np.load(x)", "np.load(x, allow_pickle=True)", "np.memmap(x)",
    "import_module(x)", "import_module(f'polebook.{x}')", "Thread(target=import_module, args=(x,))",
    "importlib.import_module(x)", "asyncio.open_connection(x)", "loop.create_server(x)", "import ctypes",
    "asyncio.create_subprocess_shell(x)", "run(x, shell=True)", "getattr(o, '__globals__')", "f.__globals__",
    "breakpoint()", "import multiprocessing",
])
def test_what_is_barred_is_seen(text):
    assert wrongs(ast.parse(text), "chain/read.py")


@pytest.mark.parametrize(("file", "text"), [
    ("plan/process.py", "import subprocess\nsubprocess.run(x)"),
    ("plan/process.py", "import subprocess\nsubprocess.Popen(['sh', '-c', x])"),
    ("plan/process.py", "import subprocess\nsubprocess.Popen([sys.executable, '-c', program])"),
    ("plan/process.py", "import subprocess\nsubprocess.Popen([sys.executable, '-P', '-c', program], shell=True)"),
    ("plan/process.py", "import subprocess\nsubprocess.check_output([sys.executable, '-P', '-c', program])"),
    ("record/git.py", "import subprocess\nsubprocess.run('git log', shell=True)"),
    ("record/git.py", "import subprocess\nsubprocess.run([program, 'push'])"),
    ("record/git.py", f"import subprocess\nsubprocess.run({STARTERS['record/git.py'][0]}, shell=True)"),
    ("record/post.py", f"import subprocess\nsubprocess.run({STARTERS['record/git.py'][0]})"),
    ("cli/main.py", "import_module(f'{x}.cli')"),
])
def test_a_starter_may_start_its_own_only(file, text):
    assert wrongs(ast.parse(text), file)


def test_the_second_process_runs_a_text_that_stands_in_the_source():
    """What a `Process` is begun with is a constant PROGRAM of the file that begins it, and imports what is ours."""
    begun_with = {}  # class -> what it hands on
    for node in (node for tree in trees().values() for node in ast.walk(tree) if isinstance(node, ast.ClassDef)):
        if any(ast.unparse(base) == "Process" for base in node.bases):
            begun_with[node.name] = {ast.unparse(call.args[0]) for call in ast.walk(node) if isinstance(call, ast.Call)
                                     and ast.unparse(call.func) == "super().__init__"}
    assert {"Helper", "Apart"} <= begun_with.keys()
    assert all(one in ({"PROGRAM"}, {"program"}) for one in begun_with.values())
    programs = set()
    for tree in trees().values():
        calls = [node for node in ast.walk(tree) if isinstance(node, ast.Call)
                 and begun_with.get(ast.unparse(node.func)) == {"program"}]
        assert all(ast.unparse(call.args[0]) == "PROGRAM" for call in calls)
        found = [node.value for node in ast.walk(tree) if isinstance(node, ast.Assign)
                 and ast.unparse(node.targets[0]) == "PROGRAM"]
        assert len(found) <= 1 and all(isinstance(one, ast.Constant) for one in found) and (found or not calls)
        programs |= {one.value for one in found}
    assert len(programs) >= 2
    for text in programs:
        imported, call = ast.parse(text).body
        assert isinstance(imported, ast.ImportFrom) and imported.module.startswith("polebook.")
        assert ast.unparse(call) == "serve()"
