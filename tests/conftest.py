"""What all tests stand on."""

from __future__ import annotations

import signal

# A shell that starts the tests in the background lets them ignore Ctrl-C, and so would every
# process that they start and interrupt.
if signal.getsignal(signal.SIGINT) == signal.SIG_IGN:
    signal.signal(signal.SIGINT, signal.default_int_handler)
