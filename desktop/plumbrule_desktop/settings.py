"""What the window remembers of the person: in an ini file of the user's configuration folder."""

import os
from pathlib import Path

from PySide6.QtCore import QByteArray, QSettings

from plumbrule_desktop.look import Scheme

SETTINGS_VARIABLE = "PLUMBRULE_SETTINGS"
"""Names another ini file, for tests and portable use."""
RECENT_LIMIT = 8


class Settings:
    """Typed access to the ini file; everything has a default, and what cannot be read counts as absent."""

    def __init__(self) -> None:
        path = os.environ.get(SETTINGS_VARIABLE)
        if path:
            self._store = QSettings(path, QSettings.Format.IniFormat)
        else:
            self._store = QSettings(
                QSettings.Format.IniFormat, QSettings.Scope.UserScope, "Plumbrule", "Plumbrule"
            )

    @property
    def scheme(self) -> Scheme:
        """The colour scheme that was chosen."""
        value = self._store.value("scheme")
        if value == "light":
            return "light"
        return "dark" if value == "dark" else "system"

    @scheme.setter
    def scheme(self, scheme: Scheme) -> None:
        self._store.setValue("scheme", scheme)

    @property
    def recent(self) -> tuple[Path, ...]:
        """Casebooks opened lately that still exist, the latest first."""
        kept = self._store.value("recent")
        names = [kept] if isinstance(kept, str) else kept if isinstance(kept, list) else []
        return tuple(path for path in (Path(str(name)) for name in names if name) if path.exists())

    def remember(self, path: Path) -> None:
        """Put a casebook at the head of the recent ones."""
        others = [each for each in self.recent if each != path]
        self._store.setValue("recent", [str(each) for each in (path, *others)[:RECENT_LIMIT]])

    def forget_recent(self) -> None:
        """Empty the list of recent casebooks."""
        self._store.remove("recent")

    @property
    def geometry(self) -> QByteArray | None:
        """Where the window stood."""
        value = self._store.value("geometry")
        return value if isinstance(value, QByteArray) else None

    @geometry.setter
    def geometry(self, geometry: QByteArray) -> None:
        self._store.setValue("geometry", geometry)

    def three_d(self, key: str) -> str | None:
        """What the probe for 3-D said under the same circumstances: `yes`, a reason, or None."""
        value = self._store.value(f"three_d/{key}")
        return value if isinstance(value, str) and value else None

    def remember_three_d(self, key: str, answer: str) -> None:
        """Keep the probe's answer."""
        self._store.setValue(f"three_d/{key}", answer)

    def sync(self) -> None:
        """Write to disk now."""
        self._store.sync()
