"""Pages, screens and data of a card: measured and placed first, then drawn, then read back.

Import the module you need: `typesetting` (PDF), `readback`, `html`, `html_readback`, `data` (CSV,
JSON), `produce` (any of them, read back) and `release` (issue numbers and files). The PDF
libraries load only when a PDF is drawn or read.
"""
