"""The rules of the house as functions from source text to a list of breaches."""

from __future__ import annotations

import ast
import io
import re
import subprocess
import tokenize
from collections.abc import Iterator
from pathlib import Path

ROOT = Path(__file__).resolve().parents[1]
FILE_LINES = 400
FUNCTION_LINES = 60

Function = ast.FunctionDef | ast.AsyncFunctionDef

# Each pattern is written so that it does not match itself.
FORBIDDEN = {
    "a path of somebody's machine": r"(?<![\w.])/(wor[k]|tm[p]|hom[e]|roo[t]|User[s])/",
    "a host of packages": r"pyp[i]\.org|pythonhoste[d]|npmj[s]\.|proxy\.golan[g]|debia[n]\.org",
    "a number of a tracker": r"(?i)\bissue[s]? #?\d",
    "a tool of the workplace": r"(?i)\bclaud[e]\b|anthropi[c]|chatgp[t]|copilo[t]\b",
}


def repository_files() -> list[Path]:
    """Return every file that is, or would be, in the repository."""
    git = ["git", "-c", "safe.directory=*", "ls-files", "-z", "-co", "--exclude-standard"]
    try:
        done = subprocess.run(git, cwd=ROOT, capture_output=True, check=True)
    except (OSError, subprocess.CalledProcessError):  # no git, or an unpacked archive
        found = [path for path in ROOT.rglob("*") if "__pycache__" not in path.parts]
    else:
        found = [ROOT / name for name in done.stdout.decode().split("\0") if name]
    return sorted(path for path in found if path.is_file())


def python_files(*folders: str) -> list[Path]:
    """Return the Python files of the repository below the named folders."""
    return [
        path
        for path in repository_files()
        if path.suffix == ".py" and path.relative_to(ROOT).parts[0] in folders
    ]


def functions_of(tree: ast.AST) -> list[Function]:
    """Return all functions and methods, nested ones too."""
    return [node for node in ast.walk(tree) if isinstance(node, Function)]


def docstring_lines(tree: ast.AST) -> set[int]:
    """Return the numbers of all lines that belong to docstrings."""
    lines: set[int] = set()
    for node in ast.walk(tree):
        if not isinstance(node, Function | ast.ClassDef | ast.Module) or not node.body:
            continue
        first = node.body[0]
        if ast.get_docstring(node, clean=False) is not None:
            lines |= set(range(first.lineno, (first.end_lineno or first.lineno) + 1))
    return lines


def code_lines(source: str) -> set[int]:
    """Return the numbers of all lines with code: no blanks, comments or docstrings."""
    lines: set[int] = set()
    silent = {
        tokenize.COMMENT,
        tokenize.NL,
        tokenize.NEWLINE,
        tokenize.INDENT,
        tokenize.DEDENT,
        tokenize.ENDMARKER,
    }
    for token in tokenize.generate_tokens(io.StringIO(source).readline):
        if token.type not in silent:
            lines |= set(range(token.start[0], token.end[0] + 1))
    return lines - docstring_lines(ast.parse(source))


def long_functions(source: str, *, limit: int = FUNCTION_LINES) -> list[str]:
    """Name the functions with more code lines than the limit."""
    code = code_lines(source)
    breaches = []
    for function in functions_of(ast.parse(source)):
        span = range(function.lineno, (function.end_lineno or function.lineno) + 1)
        count = len(code.intersection(span))
        if count > limit:
            breaches.append(f"{function.name} has {count} code lines")
    return breaches


def own_nodes(function: Function) -> Iterator[ast.AST]:
    """Yield the nodes of a function without those of functions nested in it."""
    waiting: list[ast.AST] = list(function.body)
    while waiting:
        node = waiting.pop()
        yield node
        if not isinstance(node, Function | ast.ClassDef | ast.Lambda):
            waiting.extend(ast.iter_child_nodes(node))


def raises(function: Function) -> bool:
    """Tell whether a function itself raises an error (a re-raise of one caught counts too)."""
    return any(isinstance(node, ast.Raise) for node in own_nodes(function))


def called_names(function: Function) -> set[str]:
    """Return the plain names that a function calls."""
    return {
        node.func.id
        for node in own_nodes(function)
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Name)
    }


def raising_functions(tree: ast.Module) -> set[str]:
    """Return the module's top-level functions that raise, also through its private ones."""
    top = {node.name: node for node in tree.body if isinstance(node, Function)}
    found = {name for name, function in top.items() if raises(function)}
    while True:
        hidden = {name for name in found if name.startswith("_")}
        more = {name for name, function in top.items() if called_names(function) & hidden}
        if more <= found:
            return found
        found |= more


def public_functions(tree: ast.Module) -> Iterator[tuple[str, Function]]:
    """Yield the public functions of a module and the public methods of its public classes."""
    for node in tree.body:
        if isinstance(node, Function) and not node.name.startswith("_"):
            yield node.name, node
        elif isinstance(node, ast.ClassDef) and not node.name.startswith("_"):
            for member in node.body:
                if isinstance(member, Function) and not member.name.startswith("_"):
                    yield f"{node.name}.{member.name}", member


def undocumented_raises(source: str) -> list[str]:
    """Name the public functions that raise but whose docstring has no ``Raises``."""
    tree = ast.parse(source)
    raising = raising_functions(tree)
    breaches = []
    for name, function in public_functions(tree):
        is_raising = name in raising or raises(function)
        if is_raising and not re.search(
            r"^Raises\n-{6}$", ast.get_docstring(function) or "", re.MULTILINE
        ):
            breaches.append(f"{name} raises, but its docstring has no Raises section")
    return breaches


def imported_modules(source: str) -> set[str]:
    """Return the top-level names of everything a module imports, anywhere in it."""
    names: set[str] = set()
    for node in ast.walk(ast.parse(source)):
        if isinstance(node, ast.Import):
            names |= {alias.name.partition(".")[0] for alias in node.names}
        elif isinstance(node, ast.ImportFrom) and node.module:
            names.add(node.module.partition(".")[0])
    return names


def exported(tree: ast.Module) -> list[str] | None:
    """Return the names in ``__all__``, or ``None`` where a module has none."""
    for node in tree.body:
        if isinstance(node, ast.Assign) and ast.unparse(node.targets[0]) == "__all__":
            return [str(name) for name in ast.literal_eval(node.value)]
    return None


def unexported(source: str) -> list[str]:
    """Name the public functions and classes that are missing in ``__all__``."""
    tree = ast.parse(source)
    names = exported(tree)
    public = [
        node.name
        for node in tree.body
        if isinstance(node, Function | ast.ClassDef) and not node.name.startswith("_")
    ]
    if names is None:
        return [f"no __all__, but {', '.join(public)} is public"] if public else []
    return [f"{name} is public, but not in __all__" for name in public if name not in names]


def bare_exceptions_to_rules(source: str) -> list[str]:
    """Name the lint and type exceptions that lack a code or a reason.

    The reason stands behind the code on the same line, or in a comment on the line before.
    """
    lines = source.splitlines()
    pattern = re.compile(
        r"#\s*(?:noqa(?P<noqa>:\s*[A-Z]+\d+(?:,\s*[A-Z]+\d+)*)?"
        r"|type:\s*ignore(?P<type>\[[\w, -]+\])?)(?P<reason>.*)"
    )
    breaches = []
    for token in tokenize.generate_tokens(io.StringIO(source).readline):
        match = pattern.search(token.string) if token.type == tokenize.COMMENT else None
        if match is None:
            continue
        row = token.start[0]
        above = row > 1 and lines[row - 2].lstrip().startswith("#")
        explained = above or re.search(r"[A-Za-z]{3}", match["reason"])
        if not (match["noqa"] or match["type"]):
            breaches.append(f"line {row}: no code in {token.string!r}")
        elif not explained:
            breaches.append(f"line {row}: no reason for {token.string!r}")
    return breaches


def fast_math(source: str) -> list[str]:
    """Name the calls that switch on a fast, wrong arithmetic or uncacheable threads."""
    return [
        f"line {node.value.lineno}: {node.arg}={ast.unparse(node.value)}"
        for node in ast.walk(ast.parse(source))
        if isinstance(node, ast.keyword)
        and node.arg in {"fastmath", "parallel"}
        and ast.unparse(node.value) != "False"
    ]


def forbidden_words(text: str) -> list[str]:
    """Name the places where a text speaks of something else than the product."""
    return [
        f"line {number}: {what}: {line.strip()[:80]}"
        for number, line in enumerate(text.splitlines(), start=1)
        for what, pattern in FORBIDDEN.items()
        if re.search(pattern, line)
    ]
