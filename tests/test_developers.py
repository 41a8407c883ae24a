"""DEVELOPERS.md lists every file of the package with the line the file itself begins with."""

import ast


def test_the_house_lists_every_file_with_its_first_line(request):
    root = request.config.rootpath
    package = root / "pipeline" / "keptair"
    said = (root / "DEVELOPERS.md").read_text(encoding="utf-8")
    listed = {line for line in said.splitlines() if line.startswith("- `")}
    wanted = set()
    for file in sorted(package.rglob("*.py")):
        first_line = (ast.get_docstring(ast.parse(file.read_text(encoding="utf-8"))) or "").splitlines()[0]
        wanted.add(f"- `{file.relative_to(package).as_posix()}`: {first_line}")
    assert wanted - listed == set(), "add these lines to DEVELOPERS.md"
    assert {line for line in listed if ".py`:" in line} - wanted == set(), "take these lines out of DEVELOPERS.md"
