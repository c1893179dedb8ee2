"""The written section: one small document model, sentences that follow from the verdicts, and their renderers.

- what a document is made of, and how a sentence is put together: ``document``
- how a number is rounded: ``numbers``
- which paragraphs there are, in order: ``section``
- LaTeX, Markdown, HTML: ``latex``, ``markdown``, ``html``
"""
