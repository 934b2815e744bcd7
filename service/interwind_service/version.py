"""The version of the service, taken from the installed distribution so that it is written once."""

from importlib.metadata import version

SERVICE_VERSION = version("interwind")
