"""Reading the user's files: only from the project's folder, whole, as UTF-8, and with their SHA-256."""

from __future__ import annotations

import contextlib
import hashlib
import tomllib
from pathlib import Path, PurePosixPath, PureWindowsPath
from typing import Final

from supplycheck.findings import Place
from supplycheck.model import InputFile
from supplycheck.project.faults import FaultList, quoted

LARGEST_FILE: Final = 50_000_000
_UTF16: Final = (b"\xff\xfe", b"\xfe\xff")


def decode(data: bytes, name: str, faults: FaultList) -> str | None:
    """Return ``data`` as text, a leading byte-order mark taken off; ``None`` with a fault noted."""
    remedy = "save the file as UTF-8 (in a spreadsheet: CSV UTF-8)"
    if data.startswith(_UTF16):
        faults.add(Place(name), "is not UTF-8", found="UTF-16", allowed="UTF-8", remedy=remedy)
        return None
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as caught:
        line = data.count(b"\n", 0, caught.start) + 1
        byte = f"byte 0x{data[caught.start]:02x}"
        faults.add(Place(name, f"line {line}"), "is not UTF-8", found=byte, allowed="UTF-8", remedy=remedy)
        return None


def files_named(path: Path) -> tuple[Path, ...]:
    """Return the project file ``path`` and the tables that it names, whether or not they can be read."""
    with contextlib.suppress(OSError, RuntimeError):
        path = path.resolve()
    try:
        network = tomllib.loads(path.read_bytes().decode("utf-8-sig")).get("network", {})
    except (OSError, ValueError, RecursionError):
        return (path,)
    names = network.values() if isinstance(network, dict) else ()
    tables = [name.partition("#")[0] for name in names if isinstance(name, str)]
    return (path, *(path.parent / name for name in tables if "\0" not in name))


class Folder:
    """The folder of a project and the files read from it so far."""

    def __init__(self, root: Path, faults: FaultList) -> None:
        self.root = root.resolve()
        self.faults = faults
        self._files: dict[str, InputFile] = {}
        self._data: dict[str, bytes] = {}

    def _path(self, name: str, place: Place) -> Path | None:
        """Return the path of ``name`` inside the folder; ``None`` with a fault noted."""
        inside = "a file in the folder of the project"
        if not name.strip() or "\0" in name:
            self.faults.add(place, "is not a file name", found=quoted(name), allowed=inside)
            return None
        if PurePosixPath(name).is_absolute() or PureWindowsPath(name).drive or PureWindowsPath(name).root:
            self.faults.add(
                place,
                "is an absolute path",
                found=quoted(name),
                allowed=inside,
                remedy="copy the file beside the project file and write its name alone",
            )
            return None
        try:
            path = (self.root / name).resolve()
        except (OSError, RuntimeError):
            path = None
        if path is None or not path.is_relative_to(self.root):
            self.faults.add(
                place,
                "leads outside the folder of the project",
                found=quoted(name),
                allowed=inside,
                remedy="copy the file beside the project file and write its name alone",
            )
            return None
        return path

    def read(self, name: str, place: Place) -> bytes | None:
        """Return the bytes of the file ``name`` named at ``place``; ``None`` with a fault noted."""
        if name in self._data:
            return self._data[name]
        path = self._path(name, place)
        if path is None:
            return None
        try:
            size = path.stat().st_size
            if not path.is_file():
                self.faults.add(place, "is not a file", found=quoted(name), allowed="a file")
                return None
            if size > LARGEST_FILE:
                self.faults.add(
                    place,
                    "the file is too large",
                    found=f"{size / 1e6:.0f} MB",
                    allowed=f"at most {LARGEST_FILE / 1e6:.0f} MB",
                )
                return None
            data = path.read_bytes()
        except FileNotFoundError:
            self.faults.add(
                place, "the file does not exist", found=quoted(name), remedy=self._neighbours(path)
            )
            return None
        except OSError as caught:
            self.faults.add(place, f"the file cannot be read ({caught.strerror})", found=quoted(name))
            return None
        self._data[name] = data
        digest = hashlib.sha256(data).hexdigest()
        self._files[name] = InputFile(name, digest, len(data), None)
        return data

    @staticmethod
    def _neighbours(path: Path) -> str:
        try:
            names = sorted(
                each.name for each in path.parent.iterdir() if each.suffix in (".csv", ".xlsx", ".toml")
            )
        except OSError:
            return "the folder does not exist either"
        return f"the folder holds {', '.join(names[:8])}" if names else "the folder holds no table"

    def read_text(self, name: str, place: Place) -> str | None:
        """Return the file as text; ``None`` with a fault noted."""
        data = self.read(name, place)
        if data is None:
            return None
        text = decode(data, name, self.faults)
        if text is not None:
            known = self._files[name]
            self._files[name] = InputFile(known.name, known.sha256, known.size, text)
        return text

    def files(self) -> tuple[InputFile, ...]:
        """Return what has been read, in order."""
        return tuple(self._files.values())
