"""The type of an open transaction, for those who only hand it on."""

from sqlmodel import Session as Transaction

__all__ = ["Transaction"]
