"""The look of the window: fonts, palette and style sheet, light and dark.

The style sheet is the same in every theme: it names roles of Qt's palette, and the palette holds the colours. To set
another style sheet takes Qt ten times as long as to let every widget look its rules up again.
"""

from collections.abc import Iterable
from string import Template

from PySide6.QtCore import Qt
from PySide6.QtGui import QColor, QFont, QFontDatabase, QGuiApplication, QPalette
from PySide6.QtWidgets import QApplication, QWidget

from creditdesk.base.palette import DARK, LIGHT, Palette
from creditdesk.desk.settings import Theme
from creditdesk.house.fontfiles import font_files

SANS = "Source Sans Pro"
SERIF = "Source Serif Pro"
_WORN = "palette worn"

_Role = QPalette.ColorRole
_ROLES = {
    "paper": (_Role.Window,),
    "sheet": (_Role.Base, _Role.Button, _Role.ToolTipBase),
    "band": (_Role.AlternateBase,),
    "ink": (_Role.WindowText, _Role.Text, _Role.ButtonText, _Role.HighlightedText, _Role.ToolTipText),
    "second_ink": (_Role.PlaceholderText,),
    "selection": (_Role.Highlight,),
    "accent": (_Role.Link, _Role.Accent),
    "rule": (_Role.Mid,),
    "caution": (_Role.BrightText,),
    "breach": (_Role.LinkVisited,),
    "strength": (_Role.Midlight,),
}
"""The roles that carry each colour, the one the style sheet names first. Qt knows no caution, breach or strength: they
take roles that nothing draws with where the style sheet rules."""

_STYLE = Template("""
QMainWindow, QDialog, #desk, QMenuBar, QMenu, QStatusBar { background: $paper; }
#standing { background: $sheet; border-left: 1px solid $rule; }
#standing QScrollArea, #standing QScrollArea > QWidget > QWidget { background: $sheet; border: 0; }
#header { border-bottom: 1px solid $rule; }
QStatusBar { border-top: 1px solid $rule; color: $second_ink; }
QStatusBar QLabel { color: $second_ink; padding: 2px 20px; }
QStatusBar::item { border: 0; }
QMenuBar { padding-left: 13px; }
QMenuBar::item { padding: 4px 9px; background: transparent; }
QMenuBar::item:selected, QMenu::item:selected { background: $selection; }
QMenu { border: 1px solid $rule; padding: 4px; }
QMenu::item { padding: 4px 26px 4px 14px; }
QMenu::item:disabled { color: $second_ink; }
QMenu::separator { height: 1px; background: $rule; margin: 4px 6px; }
QLabel[role="obligor"] { font-family: "$serif"; font-size: 19pt; font-weight: 600; }
QLabel[role="heading"] { font-family: "$serif"; font-size: 11.5pt; font-weight: 600; color: $accent; }
QLabel[role="second"] { color: $second_ink; }
QLabel[role="caution"] { color: $caution; }
QLabel[role="strong"] { font-weight: 600; }
QLabel[role="strength"] { color: $strength; font-weight: 600; }
#outcome QLabel[role="strength"], #outcome QLabel[role="breach"] { font-family: "$serif"; font-size: 14pt; }
#facts { background: $sheet; border: 1px solid $rule; }
#facts QLabel[role="breach"] { font-family: "$sans"; font-size: 10.5pt; }
QLabel[role="notice"] { color: $caution; font-weight: 600; background: $band; padding: 3px 8px; }
QLabel[role="breach"] { color: $breach; font-weight: 600; }
QLabel[role="pd"] { font-size: 36pt; font-weight: 600; }
QLabel[role="pd-words"] { font-size: 15pt; font-weight: 600; color: $breach; }
#grade { background: $paper; border: 1.5px solid $ink; }
#grade QLabel { background: transparent; }
QLabel[role="grade"] { font-family: "$serif"; font-size: 24pt; font-weight: 600; }
#sheets QPushButton { border: 0; border-bottom: 3px solid transparent; padding: 5px 2px; margin-right: 22px;
  background: transparent; color: $second_ink; font-size: 11pt; }
#sheets QPushButton:hover { color: $ink; }
#sheets QPushButton:checked { color: $ink; font-weight: 600; border-bottom-color: $accent; }
#sheets QPushButton:focus { background: $selection; }
#sheets QPushButton[role="find"] { margin-right: 0; font-size: 10.5pt; }
#sheets QPushButton[role="find"]:checked { font-weight: 400; }
#palette { background: $sheet; border: 1.5px solid $accent; }
#palette QLineEdit { border: 0; border-bottom: 1px solid $rule; font-size: 13pt; padding: 6px 8px; }
#palette QListView { background: $sheet; border: 0; outline: 0; }
QPushButton, QToolButton { background: $sheet; border: 1px solid $rule; padding: 5px 13px; }
QPushButton:hover, QToolButton:hover { border-color: $accent; }
QPushButton:pressed, QPushButton:checked { background: $selection; }
QPushButton:default { border-color: $accent; font-weight: 600; }
QPushButton:focus, QToolButton:focus { border-color: $accent; background: $selection; }
QPushButton[role="link"] { border: 0; background: transparent; color: $accent; padding: 0 4px; }
QPushButton[role="link"]:hover, QPushButton[role="link"]:focus { background: $selection; }
QPushButton[role="scenario"] { margin-right: -1px; padding: 4px 12px; }
QPushButton[role="scenario"]:checked { background: $sheet; font-weight: 600; border-bottom-color: $accent; }
QPushButton[role="scenario"]:focus { background: $selection; }
QPushButton[role="small"] { padding: 1px 9px; }
QProgressBar { background: $band; border: 1px solid $rule; }
QProgressBar::chunk { background: $accent; }
QPushButton:disabled { color: $second_ink; background: $paper; border-color: $rule; }
QLineEdit, QPlainTextEdit, QComboBox, QAbstractSpinBox { background: $sheet; border: 1px solid $rule; padding: 4px; }
QLineEdit:focus, QPlainTextEdit:focus, QComboBox:focus, QAbstractSpinBox:focus { border-color: $accent; }
QAbstractSpinBox { padding: 3px; }
QAbstractSpinBox::up-button, QAbstractSpinBox::down-button { background: transparent; border: 0; width: 20px; }
QAbstractSpinBox::up-arrow, QAbstractSpinBox::down-arrow { width: 0; height: 0; border-left: 4px solid $sheet;
  border-right: 4px solid $sheet; }
QAbstractSpinBox::up-arrow { border-bottom: 5px solid $second_ink; }
QAbstractSpinBox::down-arrow { border-top: 5px solid $second_ink; }
QCheckBox { spacing: 7px; padding: 2px 0; }
QCheckBox::indicator { width: 7px; height: 7px; padding: 2px; border: 1px solid $second_ink; background: $sheet;
  background-clip: content; }
QCheckBox::indicator:checked { background: $accent; }
QCheckBox::indicator:focus { border-color: $accent; }
QCheckBox:disabled { color: $second_ink; }
QCheckBox::indicator:disabled { border-color: $rule; }
QLabel[role="fault"] { color: $breach; }
QLineEdit[fault="true"], QComboBox[fault="true"] { border-color: $breach; }
QLineEdit, QPlainTextEdit { placeholder-text-color: $second_ink; }
QComboBox { padding: 4px 5px; }
QComboBox::drop-down { border: 0; width: 20px; }
QComboBox::down-arrow { width: 0; height: 0; border-left: 4px solid $sheet; border-right: 4px solid $sheet;
  border-top: 5px solid $second_ink; }
QComboBox QAbstractItemView { background: $sheet; border: 1px solid $rule; outline: 0; }
QSlider::groove:horizontal { height: 4px; background: $rule; border-radius: 2px; }
QSlider::handle:horizontal { width: 12px; margin: -6px 0; border-radius: 7px; background: $sheet;
  border: 1.5px solid $second_ink; }
QSlider::handle:horizontal:hover, QSlider::handle:horizontal:focus { border-color: $accent; }
QSlider::handle:horizontal:focus { background: $selection; }
QSlider::handle:horizontal:disabled { border-color: $rule; }
QTableView { background: $paper; alternate-background-color: $paper; border: 0; gridline-color: transparent;
  outline: 0; }
QTableView::item { border-bottom: 1px solid $rule; padding: 0 7px; }
QTableView::item:selected { background: $selection; color: $ink; }
QTableView QLineEdit { border: 1.5px solid $accent; padding: 0 4px; }
QHeaderView { background: $paper; }
QHeaderView::section { background: $paper; border: 0; border-bottom: 1.5px solid $ink; padding: 6px 7px;
  font-weight: 600; }
QTableWidget QHeaderView::section { padding: 6px 10px; }
QTableCornerButton::section { background: $paper; border: 0; }
QScrollArea { border: 0; background: $paper; }
#pages { background: $band; }
QSplitter::handle { background: $rule; }
QSplitter::handle:hover { background: $accent; }
QDialogButtonBox { dialogbuttonbox-buttons-have-icons: 0; }
QMessageBox #qt_msgbox_label { font-weight: 600; }
QMessageBox #qt_msgbox_informativelabel { min-width: 420px; }
QToolTip { background: $sheet; color: $ink; border: 1px solid $rule; padding: 4px; }
QScrollBar:vertical { background: transparent; width: 11px; }
QScrollBar:horizontal { background: transparent; height: 11px; }
QScrollBar::handle { background: $rule; border-radius: 4px; min-height: 28px; min-width: 28px; }
QScrollBar::handle:hover { background: $second_ink; }
QScrollBar::add-line, QScrollBar::sub-line, QScrollBar::add-page, QScrollBar::sub-page { background: none; border: 0;
  width: 0; height: 0; }
""")


def chosen_palette(choice: Theme) -> Palette:
    """Return the palette of the user's choice, the system's where that decides."""
    return {Theme.LIGHT: LIGHT, Theme.DARK: DARK}.get(choice) or system_palette()


def system_palette() -> Palette:
    """Return the palette that follows the system's choice of light or dark."""
    return DARK if QGuiApplication.styleHints().colorScheme() == Qt.ColorScheme.Dark else LIGHT


def load_fonts() -> None:
    """Give Qt the program's own fonts, the same files the memo embeds."""
    for path in font_files():
        QFontDatabase.addApplicationFont(str(path))


def style_sheet() -> str:
    """Return the style sheet, the same for every palette."""
    words = {colour: f"palette({_word(roles[0])})" for colour, roles in _ROLES.items()}
    return _STYLE.substitute(words, serif=SERIF, sans=SANS)


def apply(application: QApplication, palette: Palette) -> None:
    """Dress the whole application in ``palette``; nothing to do where it wears it already."""
    worn = application.property(_WORN)
    if worn == palette.name:
        return
    application.setProperty(_WORN, palette.name)
    if worn is None:
        _prepare(application)
    application.setPalette(_qt_palette(palette))
    if worn is None:
        application.setStyleSheet(style_sheet())
    else:
        _look_again(application.allWidgets())


def _prepare(application: QApplication) -> None:
    """Set what is the same in every palette; each of these has every widget looked at again, so once is enough."""
    font = QFont(SANS)
    font.setPointSizeF(10.5)
    font.setFeature(QFont.Tag("tnum"), 1)
    application.setStyle("Fusion")
    application.setFont(font)


def _look_again(widgets: Iterable[QWidget]) -> None:
    """Have widgets take their colours from the palette anew: Qt keeps those it once looked up for a rule."""
    for widget in widgets:
        style = widget.style()
        style.unpolish(widget)
        style.polish(widget)
        widget.update()


def _word(role: QPalette.ColorRole) -> str:
    """Return how a style sheet names a role, as LinkVisited is link-visited."""
    return "".join(f"-{letter.lower()}" if letter.isupper() else letter for letter in role.name).removeprefix("-")


def _qt_palette(palette: Palette) -> QPalette:
    """Return Qt's roles filled from ``palette``."""
    result = QPalette()
    for colour, roles in _ROLES.items():
        for role in roles:
            result.setColor(role, QColor(getattr(palette, colour)))
    return result
