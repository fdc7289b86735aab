"""Turns the colour tokens into Qt: palette, style sheet, fonts, tinted icons."""

from __future__ import annotations

from functools import lru_cache
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QByteArray, Qt, QTemporaryDir
from PySide6.QtGui import (
    QColor,
    QFont,
    QFontDatabase,
    QGuiApplication,
    QIcon,
    QPainter,
    QPalette,
    QPixmap,
)
from PySide6.QtSvg import QSvgRenderer

from phasebrush.look.colour_maps import mixed
from phasebrush.look.tokens import DARK, LIGHT, LOOKS, Look
from phasebrush.sample_files import icons_folder

if TYPE_CHECKING:
    from PySide6.QtWidgets import QApplication

GRID = 8
ICON_INK = "#22262B"
FONTS = ("Inter", "Segoe UI", "SF Pro Text", "Noto Sans", "DejaVu Sans")


def system_look() -> Look:
    """The look that the desktop's own setting asks for."""
    scheme = QGuiApplication.styleHints().colorScheme()
    return DARK if scheme == Qt.ColorScheme.Dark else LIGHT


def look_named(name: str) -> Look:
    """A look by name; anything but ``"light"`` and ``"dark"`` follows the system."""
    return LOOKS.get(name) or system_look()


def font(points: float = 9.0, *, bold: bool = False) -> QFont:
    """The program's font with tabular figures."""
    families = [name for name in FONTS if name in QFontDatabase.families()]
    made = QFont(families[0] if families else QGuiApplication.font().family())
    made.setPointSizeF(points)
    made.setBold(bold)
    made.setFeature(QFont.Tag("tnum"), 1)
    return made


def apply(application: QApplication, look: Look) -> None:
    """Dress the whole application."""
    palette = QPalette()
    roles = {
        QPalette.ColorRole.Window: look.ground,
        QPalette.ColorRole.Base: look.panel,
        QPalette.ColorRole.AlternateBase: look.ground,
        QPalette.ColorRole.Button: look.panel,
        QPalette.ColorRole.WindowText: look.text,
        QPalette.ColorRole.Text: look.text,
        QPalette.ColorRole.ButtonText: look.text,
        QPalette.ColorRole.ToolTipBase: look.panel,
        QPalette.ColorRole.ToolTipText: look.text,
        QPalette.ColorRole.PlaceholderText: look.muted,
        QPalette.ColorRole.Highlight: look.focus,
        QPalette.ColorRole.HighlightedText: look.panel,
        QPalette.ColorRole.Link: look.focus,
    }
    for role, colour in roles.items():
        palette.setColor(role, QColor(colour))
    disabled = QPalette.ColorGroup.Disabled
    for role in (QPalette.ColorRole.Text, QPalette.ColorRole.ButtonText):
        palette.setColor(disabled, role, QColor(mixed(look.muted, look.panel, 0.4)))
    application.setStyle("Fusion")
    application.setPalette(palette)
    application.setFont(font())
    application.setStyleSheet(style_sheet(look))


@lru_cache(maxsize=4)
def style_sheet(look: Look) -> str:
    """Hairlines instead of boxes in boxes; every colour comes from the tokens."""
    hover = mixed(look.panel, look.hairline, 0.5)
    pressed = mixed(look.panel, look.hairline, 0.9)
    faint = mixed(look.muted, look.panel, 0.5)
    chevron, tick = (_icon_file(name, look) for name in ("chevron-down", "tick"))
    return f"""
    QMainWindow, QDialog {{ background: {look.ground}; }}
    QMainWindow::separator {{ background: {look.ground}; width: {GRID}px; height: {GRID}px; }}
    QMainWindow::separator:hover {{ background: {look.hairline}; }}
    #titleLine {{ background: {look.panel}; border: 1px solid {look.hairline};
        border-bottom: none; border-top-left-radius: 4px; border-top-right-radius: 4px; }}
    #panelBody {{ background: {look.panel}; border: 1px solid {look.hairline};
        border-top: none; border-bottom-left-radius: 4px; border-bottom-right-radius: 4px; }}
    #panelTitle, #muted, QLabel[muted="true"] {{ color: {look.muted}; }}
    QLabel[caution="true"] {{ color: {look.caution}; }}
    QToolTip {{ color: {look.text}; background: {look.panel};
        border: 1px solid {look.hairline}; padding: 4px; }}
    QToolBar {{ background: {look.ground}; border: none; spacing: 2px; padding: 4px 8px; }}
    QToolBar::separator {{ background: {look.hairline}; width: 1px; margin: 6px 8px; }}
    QToolButton {{ background: transparent; border: 1px solid transparent; border-radius: 4px;
        padding: 4px 6px; color: {look.text}; }}
    QToolButton:hover {{ background: {hover}; }}
    QToolButton:pressed, QToolButton:checked {{ background: {pressed}; }}
    QToolButton:focus {{ border-color: {look.focus}; }}
    QToolButton:disabled {{ color: {faint}; }}
    QToolButton#titleTool {{ padding: 0px 6px; border-radius: 3px; color: {look.muted}; }}
    QToolButton#titleTool:checked {{ color: {look.text}; background: {pressed}; }}
    QPushButton {{ background: {look.panel}; border: 1px solid {look.hairline};
        border-radius: 4px; padding: 4px 10px; color: {look.text}; }}
    QPushButton:hover {{ background: {hover}; }}
    QPushButton:pressed {{ background: {pressed}; }}
    QPushButton:focus {{ border-color: {look.focus}; }}
    QPushButton:default {{ border-color: {look.focus}; }}
    QPushButton:disabled {{ color: {faint}; }}
    QPushButton#quiet {{ padding: 3px 6px; text-align: left; }}
    QComboBox, QLineEdit, QSpinBox, QDoubleSpinBox {{ background: {look.panel};
        border: 1px solid {look.hairline}; border-radius: 4px; padding: 2px 4px;
        min-height: 18px; color: {look.text};
        selection-background-color: {look.focus}; selection-color: {look.panel}; }}
    QComboBox::drop-down {{ border: none; width: 16px; }}
    QComboBox::down-arrow {{ image: url({chevron}); width: 10px; height: 10px; }}
    QSpinBox::up-button, QSpinBox::down-button, QDoubleSpinBox::up-button,
    QDoubleSpinBox::down-button {{ width: 0; height: 0; border: none; }}
    QCheckBox::indicator, QListView::indicator {{ width: 12px; height: 12px;
        border: 1px solid {look.muted}; border-radius: 3px; background: {look.panel}; }}
    QCheckBox::indicator:checked, QListView::indicator:checked {{ image: url({tick}); }}
    QGroupBox {{ border: 1px solid {look.hairline}; border-radius: 4px; margin-top: 16px;
        padding-top: 4px; color: {look.muted}; }}
    QGroupBox::title {{ subcontrol-origin: margin; left: 4px; }}
    QComboBox:focus, QLineEdit:focus, QSpinBox:focus, QDoubleSpinBox:focus {{
        border-color: {look.focus}; }}
    QComboBox QAbstractItemView {{ background: {look.panel}; color: {look.text};
        border: 1px solid {look.hairline}; selection-background-color: {pressed};
        selection-color: {look.text}; }}
    QListView, QTreeView, QTableView, QScrollArea {{ background: {look.panel}; border: none;
        outline: none; }}
    QListView::item, QTreeView::item {{ padding: 2px 6px; border-radius: 3px; color: {look.text}; }}
    QListView::item:hover,
    QTreeView::item:hover {{ background: {hover}; }}
    QListView::item:selected,
    QTreeView::item:selected {{ background: {pressed}; color: {look.text}; }}
    QMenu {{ background: {look.panel}; border: 1px solid {look.hairline}; color: {look.text};
        padding: 4px; }}
    QMenu::item {{ padding: 4px 20px 4px 20px; border-radius: 3px; }}
    QMenu::item:selected {{ background: {hover}; }}
    QMenu::item:disabled {{ color: {faint}; }}
    QStatusBar {{ background: {look.ground}; color: {look.muted}; }}
    QStatusBar::item {{ border: none; }}
    QProgressBar {{ background: {look.panel}; border: 1px solid {look.hairline};
        border-radius: 3px; max-height: 8px; }}
    QProgressBar::chunk {{ background: {look.focus}; border-radius: 2px; }}
    QScrollBar:vertical {{ background: transparent; width: 8px; margin: 0; }}
    QScrollBar:horizontal {{ background: transparent; height: 8px; margin: 0; }}
    QScrollBar::handle {{ background: {look.hairline}; border-radius: 4px; min-height: 24px;
        min-width: 24px; }}
    QScrollBar::add-line, QScrollBar::sub-line {{ width: 0; height: 0; }}
    QScrollBar::add-page, QScrollBar::sub-page {{ background: transparent; }}
    QTabBar#drawerTabs {{ background: {look.panel}; border: none; }}
    QTabBar#drawerTabs::tab {{ background: transparent; color: {look.muted}; border: none;
        border-bottom: 2px solid transparent; padding: 3px 10px; margin-right: 4px; }}
    QTabBar#drawerTabs::tab:hover {{ color: {look.text}; }}
    QTabBar#drawerTabs::tab:selected {{ color: {look.text}; border-bottom-color: {look.focus}; }}
    QTabBar#drawerTabs::tab:focus {{ border-bottom-color: {look.text}; }}
    #messageBar {{ background: {look.panel}; border: 1px solid {look.hairline};
        border-left: 3px solid {look.caution}; border-radius: 4px; }}
    """


@lru_cache(maxsize=1)
def _icon_folder() -> QTemporaryDir:
    return QTemporaryDir()


def _icon_file(name: str, look: Look) -> str:
    """A tinted icon as a file: style sheets take no other."""
    path = Path(_icon_folder().path()) / f"{name}-{look.name}.png"
    _pixmap(name, look.muted, 20).save(str(path), "PNG")
    return path.as_posix()


def icon(name: str, look: Look) -> QIcon:
    """One of the program's own line icons in the text colour of a look."""
    return QIcon(_pixmap(name, look.text, 40))


@lru_cache(maxsize=128)
def _pixmap(name: str, colour: str, pixels: int) -> QPixmap:
    drawing = (icons_folder() / f"{name}.svg").read_text(encoding="utf-8")
    renderer = QSvgRenderer(QByteArray(drawing.replace(ICON_INK, colour).encode()))
    pixmap = QPixmap(pixels, pixels)
    pixmap.fill(Qt.GlobalColor.transparent)
    painter = QPainter(pixmap)
    renderer.render(painter)
    painter.end()
    return pixmap


def forget_pixmaps() -> None:
    """Drop cached pixmaps; they must not outlive the application."""
    _pixmap.cache_clear()
    style_sheet.cache_clear()
    _icon_folder.cache_clear()
