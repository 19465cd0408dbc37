"""Answers to requests: what is worked out for one document, and how it is laid out."""

from service.answers.document import answer_document

__all__ = ["answer_document"]
