"""The report from one shift to the next: gathered as data, worded once, written in three ways.

data      what a handover holds
made      what was entered in the log during a shift, whatever time it is about
changes   what changed during it
build     all of it gathered from the log and the profiles
document  headings, facts, items and cards: what every form of the report is made of
words     a handover as a document
tanks     its tanks, worded
trend     a trend as inline SVG
html      the document as one self-contained page
plain     the document as Markdown
table     the document as rows for a spreadsheet
files     the report written to a file, whole or not at all

What was typed is shown as text and nothing else in each of them.
"""

from __future__ import annotations
