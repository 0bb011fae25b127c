"""The order of the light, held: a file imports only what stands to its left, and a few libraries only where they belong."""

import ast
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parent.parent
ORDER = (
    "units spec tables circles spectrum media beam source guide scene image viewer body needs fiberscope chain report "
    "presets study published figures commands __main__ ui"
).split()
STAGES = {"source", "guide", "scene", "image", "viewer", "body"}
FILES = sorted((ROOT / "optics").rglob("*.py"))
READERS = {"tables", "presets", "published", "commands", "ui"}  # and study/bench
RAY_CHECK = {"units", "spec", "tables", "media", "fiberscope", "needs"} | STAGES


def layer(path: Path) -> str:
    return path.relative_to(ROOT / "optics").parts[0].removesuffix(".py")


def imports(path: Path) -> list[tuple[str, list[str]]]:
    """(module, names) of every import in a file, those inside functions too."""
    found = []
    for node in ast.walk(ast.parse(path.read_text())):
        if isinstance(node, ast.Import):
            found += [(alias.name, []) for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path.name}: relative import"
            found.append((node.module, [alias.name for alias in node.names]))
    return found


def modules(path: Path) -> list[str]:
    """Every module of the package that a file imports, `from optics import units` as optics.units."""
    found = []
    for module, names in imports(path):
        if module == "optics":
            found += [f"optics.{name}" for name in names if name in ORDER]
        elif module.startswith("optics."):
            found.append(module)
    return found


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.relative_to(ROOT).as_posix())
def test_imports_only_to_the_left(path):
    here = layer(path)
    if here == "__init__":
        assert not modules(path)
        return
    assert here in ORDER, f"{here} has no place in the order"
    for module in modules(path):
        other = module.split(".")[1]
        assert other in ORDER, f"{module} has no place in the order"
        assert other == here or ORDER.index(other) < ORDER.index(here), (
            f"{here} imports {other}, which stands to its right"
        )


@pytest.mark.parametrize(
    "path", [path for path in FILES if layer(path) in STAGES], ids=lambda path: path.relative_to(ROOT).as_posix()
)
def test_stages_meet_only_in_the_chain(path):
    for module, names in imports(path):
        parts = module.split(".")
        if parts[0] == "optics" and len(parts) > 1 and parts[1] in STAGES - {layer(path)}:
            for name in names:
                assert name.isupper() or name.islower(), f"{path.name} takes {name} from {module}: a Spec or a record"


@pytest.mark.parametrize("path", [*FILES, ROOT / "app.py"], ids=lambda path: path.relative_to(ROOT).as_posix())
def test_libraries_where_they_belong(path):
    here = "app" if path.name == "app.py" else layer(path)
    for module, _ in imports(path):
        top = module.split(".")[0]
        if top == "streamlit":
            assert here in ("app", "ui")
        if top == "matplotlib":
            assert here == "figures"
            assert "pyplot" not in module


@pytest.mark.parametrize(
    "path", [path for path in FILES if layer(path) not in READERS], ids=lambda path: path.relative_to(ROOT).as_posix()
)
def test_files_are_read_and_written_only_where_they_may_be(path):
    if path.relative_to(ROOT / "optics").as_posix() == "study/bench.py":
        return
    for node in ast.walk(ast.parse(path.read_text())):
        if isinstance(node, ast.Call):
            name = node.func.attr if isinstance(node.func, ast.Attribute) else getattr(node.func, "id", "")
            assert name not in ("read_text", "write_text", "read_bytes", "write_bytes", "savetxt", "loadtxt"), path
            assert not (name == "open" and isinstance(node.func, ast.Name)), f"{path} opens a file"


def test_the_ray_check_uses_no_transport_formula():
    path = ROOT / "optics/study/rays.py"
    if not path.exists():
        pytest.skip("no ray check yet")
    for module in modules(path):
        parts = module.split(".")[1:]
        assert parts[0] in {"units", "spec", "tables", "media", "fiberscope"} or parts == ["guide", "raytrace"], module


def test_nothing_stands_beside_the_agreed_top_level():
    import subprocess

    listed = subprocess.run(["git", "ls-files"], cwd=ROOT, capture_output=True, text=True, check=True).stdout.split(
        "\n"
    )
    top = {name.split("/")[0] for name in listed if name and not name.startswith(".")}
    assert top <= {"README.md", "DEVELOPERS.md", "requirements.txt", "app.py", "optics", "tests", "presets"}


def test_subpackages_hand_nothing_on():
    for path in FILES:
        if path.name == "__init__.py" and path.parent.name != "optics":
            assert not path.read_text().strip(), f"{path} is not empty"
