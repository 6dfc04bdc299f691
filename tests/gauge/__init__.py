"""Tests of the gauge."""
