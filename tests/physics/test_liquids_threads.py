"""Many threads at once get the values that one gets alone."""

from __future__ import annotations

from concurrent.futures import ThreadPoolExecutor
from threading import Barrier

from lowpoint import functions
from lowpoint.physics import fluids, seawater, unitnames

THREADS = 8
CACHES = (fluids.vapour_pressure, fluids.saturation_temperature, fluids.density, fluids.viscosity, fluids.sound_speed,
          fluids.flash, fluids.span, fluids.is_frozen, seawater.density, seawater.viscosity,
          seawater.saturation_temperature, unitnames.meaning)  # fmt: skip


def _work() -> list[float]:
    """A mixed list, every state of it new to the caches."""
    f, values = functions, []
    for i in range(12):
        t = 11.0 + 7.0 * i
        for fluid in ("water", "propane", "ammonia", "n-hexane"):
            pv = f["LP_VAPOUR_PRESSURE"](fluid, t)
            values += [pv, f["LP_DENSITY"](fluid, t, pv + 10.0), f["LP_VISCOSITY"](fluid, t)]
            values += [f["LP_SATURATION_TEMPERATURE"](fluid, pv), f["LP_FLASH"](fluid, t, pv + 1.0, 0.6 * pv)]
            values += [f["LP_FLASH_DENSITY"](fluid, t, pv, 0.6 * pv), f["LP_SOUND_SPEED"](fluid, t, pv + 3.0)]
        values += [f["LP_DENSITY"]("sea water", t, 5.0), f["LP_UNIT"](t, "deg C", "deg F")]
    return values


def _fresh() -> None:
    for cached in CACHES:
        cached.cache_clear()


def test_threads_agree_to_the_bit() -> None:
    _fresh()
    alone = _work()
    assert all(value == value for value in alone)
    _fresh()
    start = Barrier(THREADS)

    def together() -> list[float]:
        start.wait()
        return _work()

    with ThreadPoolExecutor(THREADS) as pool:
        results = [future.result() for future in [pool.submit(together) for _ in range(THREADS)]]
    assert results == [alone] * THREADS
