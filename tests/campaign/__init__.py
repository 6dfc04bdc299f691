"""Tests of campaigns; a package, so that other tests can use its stand-in for the swarm."""
