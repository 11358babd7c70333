"""A folder of results, written whole or not at all.

Everything is written beside the target and then renamed. An existing folder is replaced only if
it carries our manifest and holds nothing but what the manifest lists, unchanged.
"""

from __future__ import annotations

import hashlib
import json
import shutil
import tempfile
from collections.abc import Callable
from pathlib import Path

import hydroyield
from hydroyield.errors import Fault, OutputError

MANIFEST = "manifest.json"
_ANOTHER = "name another folder, or move this one away"


def write_folder(folder: Path, fill: Callable[[Path], None]) -> None:
    """Write a folder.

    folder : to be made, or replaced
    fill : writes the files into the folder that it is given

    Raises OutputError where the folder must not be replaced or cannot be written.
    """
    check_folder(folder)
    _put_together(folder, fill, with_manifest=True)


def write_new_folder(folder: Path, fill: Callable[[Path], None]) -> None:
    """Write a folder that is the user's from then on: never replaced, and without a manifest.

    Raises OutputError where the folder exists and is not empty, or cannot be written.
    """
    if folder.is_symlink() or (folder.exists() and not folder.is_dir()):
        raise _refused(folder, f"is a file, not a folder; {_ANOTHER}")
    if folder.is_dir() and any(folder.iterdir()):
        raise _refused(folder, f"exists and is not empty; {_ANOTHER}")
    _put_together(folder, fill, with_manifest=False)


def _put_together(folder: Path, fill: Callable[[Path], None], *, with_manifest: bool) -> None:
    try:
        folder.parent.mkdir(parents=True, exist_ok=True)
        staging = Path(tempfile.mkdtemp(prefix=f".{folder.name}-", dir=folder.parent))
    except OSError as error:
        raise _unwritable(folder, error) from None
    try:
        fill(staging)
        if with_manifest:
            _write_manifest(staging)
        staging.chmod(0o755)
        _put_in_place(staging, folder)
    except OSError as error:
        raise _unwritable(folder, error) from None
    finally:
        shutil.rmtree(staging, ignore_errors=True)


def check_folder(folder: Path) -> None:
    """Refuse early a folder that must not be replaced. Raises OutputError."""
    if not folder.exists() and not folder.is_symlink():
        return
    if not folder.is_dir():
        raise _refused(folder, f"is a file, not a folder; {_ANOTHER}")
    present = {str(p.relative_to(folder)) for p in folder.rglob("*") if not p.is_dir()}
    if not present:
        return
    if MANIFEST not in present:
        raise _refused(folder, f"exists and was not written by hydroyield; {_ANOTHER}")
    listed = _read_manifest(folder)
    foreign = sorted(present - set(listed) - {MANIFEST})
    if foreign:
        raise _refused(folder, f"holds {foreign[0]}, which hydroyield did not write; {_ANOTHER}")
    for name in sorted(present & set(listed)):
        if _sha256(folder / name) != listed[name]:
            raise _refused(folder, f"{name} was changed after it was written; {_ANOTHER}")


def _put_in_place(staging: Path, folder: Path) -> None:
    if not folder.exists():
        staging.rename(folder)
        return
    aside = Path(tempfile.mkdtemp(prefix=f".{folder.name}-old-", dir=folder.parent))
    old = folder.rename(aside / folder.name)
    try:
        staging.rename(folder)
    except OSError:
        old.rename(folder)
        raise
    finally:
        shutil.rmtree(aside, ignore_errors=True)


def _write_manifest(folder: Path) -> None:
    files = sorted(path for path in folder.rglob("*") if path.is_file())
    manifest = {
        "written_by": "hydroyield",
        "version": hydroyield.__version__,
        "sha256": {str(path.relative_to(folder)): _sha256(path) for path in files},
    }
    (folder / MANIFEST).write_text(json.dumps(manifest, indent=2) + "\n", "utf-8")


def _read_manifest(folder: Path) -> dict[str, str]:
    try:
        manifest = json.loads((folder / MANIFEST).read_text("utf-8"))
        if manifest["written_by"] == "hydroyield":
            return {str(name): str(digest) for name, digest in manifest["sha256"].items()}
    except (OSError, ValueError, KeyError, TypeError, AttributeError):
        pass
    raise _refused(folder, f"exists, and its {MANIFEST} is not one of hydroyield's; {_ANOTHER}")


def _sha256(path: Path) -> str:
    return hashlib.sha256(path.read_bytes()).hexdigest()


def _refused(folder: Path, message: str) -> OutputError:
    return OutputError([Fault(str(folder), None, "", message)])


def _unwritable(folder: Path, error: OSError) -> OutputError:
    reason = (error.strerror or str(error)).lower()
    return _refused(folder, f"cannot be written ({reason}); {_ANOTHER}")
