"""Qt without a screen, for all tests of the window; set before Qt makes its application."""

import os

os.environ["QT_QPA_PLATFORM"] = "offscreen"
