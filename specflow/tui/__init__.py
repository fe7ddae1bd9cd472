"""The terminal view: it draws what a workflow hands it, and neither computes nor touches the store.

- ``app.py``: wiring: loads in a thread, watches the project revision, owns what is shown
- ``screens/``: what fills the terminal; ``widgets/``: one part of it a file, with its keys, its style and its help
- ``messages.py``: what widgets and threads tell the app; ``tones.py``: how a state looks (never by colour alone)

Threads never touch widgets; they post messages.
"""
