"""A small window under a control, closed by Escape or a click beside it."""

from PySide6.QtCore import QPoint, Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QFrame, QHBoxLayout, QPushButton, QVBoxLayout, QWidget

from plumbrule_desktop.widgets.card import label


class Popup(QFrame):
    """A titled frame; `column` takes its content. It deletes itself when it closes."""

    def __init__(self, title: str, parent: QWidget) -> None:
        super().__init__(parent, Qt.WindowType.Popup)
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.setProperty("role", "popup")
        self.setAccessibleName(title)
        self.column = QVBoxLayout(self)
        self.column.setContentsMargins(14, 12, 14, 12)
        self.column.setSpacing(8)
        self.column.addWidget(label(title, "heading", wrap=False))

    def open_under(self, control: QWidget) -> None:
        """Show it below a control, kept on the screen."""
        self.adjustSize()
        at = control.mapToGlobal(QPoint(0, control.height() + 4))
        screen = control.screen() or QGuiApplication.primaryScreen()
        room = screen.availableGeometry()
        at.setX(max(room.left(), min(at.x(), room.right() - self.width())))
        if at.y() + self.height() > room.bottom():
            at.setY(max(room.top(), control.mapToGlobal(QPoint(0, 0)).y() - self.height() - 4))
        self.move(at)
        self.show()
        self.focusNextChild()

    def add_done(self, text: str = "Done") -> QPushButton:
        """A row with the button that takes the change over."""
        row = QHBoxLayout()
        row.addStretch(1)
        done = QPushButton(text)
        done.setProperty("role", "primary")
        done.setDefault(True)
        row.addWidget(done)
        self.column.addLayout(row)
        return done
