"""A browser for the finished report: pictures inside the page are shown, nothing is ever fetched."""

import base64
import binascii
from urllib.parse import unquote_to_bytes

from PySide6.QtCore import QByteArray, Qt, QUrl
from PySide6.QtGui import QImage, QPainter
from PySide6.QtSvg import QSvgRenderer
from PySide6.QtWidgets import QTextBrowser, QWidget

WIDEST = 1600
"""Drawings are rendered no wider than this, in device pixels."""


class ReportBrowser(QTextBrowser):
    """Shows HTML whose pictures are data: addresses."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName("The report as it will be exported")
        self.setOpenLinks(False)

    def loadResource(self, kind: int, name: QUrl | str) -> object:
        """Pictures from data: addresses; every other address stays unfetched."""
        name = QUrl(name)
        if name.scheme() != "data":
            return None
        return picture(name.toString(QUrl.ComponentFormattingOption.FullyEncoded), self.devicePixelRatioF())


def picture(address: str, ratio: float = 1.0) -> QImage:
    """The picture that a data: address holds; an empty one where it holds none."""
    head, _, body = address.removeprefix("data:").partition(",")
    try:
        data = (
            base64.b64decode(unquote_to_bytes(body), validate=True)
            if "base64" in head
            else unquote_to_bytes(body)
        )
    except binascii.Error:
        return QImage()
    return _drawing(data, ratio) if head.startswith("image/svg") else QImage.fromData(data)


def _drawing(data: bytes, ratio: float) -> QImage:
    renderer = QSvgRenderer(QByteArray(data))
    if not renderer.isValid():
        return QImage()
    size = renderer.defaultSize() * ratio
    if size.width() > WIDEST:
        size = size * (WIDEST / size.width())
    image = QImage(size, QImage.Format.Format_ARGB32_Premultiplied)
    image.fill(Qt.GlobalColor.white)
    painter = QPainter(image)
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    renderer.render(painter)
    painter.end()
    image.setDevicePixelRatio(ratio)
    return image
