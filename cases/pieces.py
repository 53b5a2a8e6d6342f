"""Unfinished work in numbered pieces, each a whole file: what a run that was killed leaves for the next one."""

from __future__ import annotations

import io
import json
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from cases.documents import plain
from cases.store import write_whole

_DOCUMENT = "document"


@dataclass(frozen=True)
class Piece:
    """One piece: a document of plain values and named arrays."""

    document: dict[str, Any]
    arrays: dict[str, Any]


class Pieces:
    """The numbered pieces under a folder: 000001.npz, 000002.npz, …; `append` adds one, `read` gives them in order."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder
        self._next = 1 + max((int(path.stem) for path in self._files()), default=0)

    def append(self, document: Mapping[str, Any], arrays: Mapping[str, Any]) -> None:
        """Write one piece; StoreError where that fails. Earlier pieces are never touched."""
        import numpy as np

        written = io.BytesIO()
        named: dict[str, Any] = {_DOCUMENT: np.array(json.dumps(plain(document))), **arrays}
        np.savez(written, **named)
        write_whole(self.folder / f"{self._next:06d}.npz", written.getvalue())
        self._next += 1

    def read(self) -> list[Piece]:
        """The pieces from the first on, as far as they are whole and none is missing."""
        import numpy as np

        pieces = []
        for number, path in enumerate(self._files(), start=1):
            if int(path.stem) != number:
                break
            try:
                with path.open("rb") as opened, np.load(opened, allow_pickle=False) as archive:
                    arrays = {name: archive[name] for name in archive.files}
                document = json.loads(str(arrays.pop(_DOCUMENT)))
            except Exception:  # a damaged archive can raise nearly anything from zipfile, zlib and numpy
                break
            pieces.append(Piece(document, arrays))
        return pieces

    def _files(self) -> list[Path]:
        return sorted(path for path in self.folder.glob("*.npz") if path.stem.isdigit())
