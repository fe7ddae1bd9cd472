"""One verb of the user = one file = one function: the only place where the boxes below meet.

A workflow hands each box what it needs from its siblings and returns data. It never prints, asks, or knows the command
line or the terminal. Two-step imports: ``preview_…`` returns what would happen as data, ``accept_…`` stores it.
"""
