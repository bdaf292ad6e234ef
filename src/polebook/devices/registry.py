"""The families of device cards and the keys that each may carry."""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType

from polebook.devices import bjt, fet, opamp, triode
from polebook.param import Param

FAMILIES: Mapping[str, tuple[Param, ...]] = MappingProxyType(
    {
        "bjt": bjt.PARAMS,
        "mosfet": fet.PARAMS_MOSFET,
        "jfet": fet.PARAMS_JFET,
        "triode": triode.PARAMS,
        "opamp": opamp.PARAMS,
    }
)
