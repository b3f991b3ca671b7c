"""The faulty example machines in simpy, as in ``stations.py``. A dead end and an endless loop have no cycle."""

from __future__ import annotations

from tests.outside.controllers import Read
from tests.outside.plant import Derived, Lasted, Valve, Waits, ms
from tests.outside.station import Course, Station
from tests.outside.stations import BACK, END, Scanned


class BottleLift(Scanned):
    def build(self) -> None:
        lift = self.centred("YL1", "YL2", ms(20, 30), ms(30, 45))
        self.cylinder(lift, ms(700, 850), ms(600, 760), {"BL1": BACK, "BL2": END})

    def cycle(self, read: Read) -> Course:
        read = yield from self.outside(read)
        read = yield from self.step(read, on="YL1", until="BL2")
        read = yield from self.step(read, on="YL2", until="BL1")
        return (yield from self.step(read, dwell=100))


class DryingCabin(Scanned):
    def build(self) -> None:
        self.coil("KF")

    def cycle(self, read: Read) -> Course:
        return (yield from self.together(read, self._blow(read), self._calm(read)))

    def _blow(self, read: Read) -> Course:
        read = yield from self.step(read, dwell=500)
        return (yield from self.step(read, also=self.set("KF"), dwell=200))

    def _calm(self, read: Read) -> Course:
        read = yield from self.step(read, dwell=505)
        return (yield from self.step(read, also=self.reset("KF"), dwell=200))


class TapeApplicator(Scanned):
    def build(self) -> None:
        pad = self.spring("YP1", ms(18, 28), ms(25, 40))
        feeder = self.spring("YT1", ms(18, 28), ms(25, 40))
        self.cylinder(pad, ms(380, 480), ms(300, 360), {"BP1": BACK})
        self.cylinder(feeder, ms(400, 500), ms(320, 400), {"BT1": BACK, "BT2": END})

    def cycle(self, read: Read) -> Course:
        read = yield from self.step(read, also=self.set("YP1", "YT1"), until="BT2")
        return (yield from self.step(read, also=self.reset("YP1", "YT1"), until=self._both_back))

    def _both_back(self) -> bool:
        return self.plc.sees("BP1") and self.plc.sees("BT1")


class TrayUnloader(Scanned):
    def build(self) -> None:
        tray = self.spring("YT1", ms(18, 28), ms(25, 40))
        fork = self.spring("YF1", ms(18, 28), ms(25, 40))
        self.cylinder(tray, ms(500, 640), ms(450, 600), {"BT1": BACK})
        self.cylinder(fork, ms(300, 380), ms(280, 350), {"BF1": BACK, "BF2": END})

    def cycle(self, read: Read) -> Course:
        read = yield from self.step(read, also=self.set("YT1"), dwell=600)
        read = yield from self.step(read, also=self.set("YF1"), until="BF2")
        read = yield from self.step(read, also=self.reset("YF1"), until="BF1")
        return (yield from self.step(read, also=self.reset("YT1"), until="BT1"))


class OutAndBack(Scanned):
    """One cylinder on a spring valve that goes out and comes back."""

    EXTEND, RETRACT = ms(350, 430), ms(300, 360)

    def build(self) -> None:
        valve = self.spring("Y", ms(18, 28), ms(25, 40))
        self.cylinder(valve, self.EXTEND, self.RETRACT, {"back": BACK, "out": END})

    def cycle(self, read: Read) -> Course:
        read = yield from self.step(read, also=self.set("Y"), until="out")
        return (yield from self.step(read, also=self.reset("Y"), until="back"))


class ParcelPusher(Scanned):
    def build(self) -> None:
        slide = self.spring("YM1", ms(18, 28), ms(25, 40))
        self.cylinder(slide, ms(400, 500), ms(350, 420), {"BM1": BACK, "BM2": (0.5, 0.53), "BM3": END})

    def cycle(self, read: Read) -> Course:
        read = yield from self.step(read, also=self.set("YM1"), until="BM2")
        read = yield from self.step(read, until="BM3")
        return (yield from self.step(read, also=self.reset("YM1"), until="BM1"))


class HopperGate(Scanned):
    def build(self) -> None:
        gate = self.centred("YG1", "YG2", ms(20, 30), ms(30, 45))
        self.cylinder(gate, ms(600, 700), ms(500, 620), {"BG1": BACK, "BG2": END})

    def cycle(self, read: Read) -> Course:
        read = yield from self.step(read, also=self.pulse("YG1", 1200), until="BG2")
        return (yield from self.step(read, on="YG2", until="BG1"))


class DrillingTable(Scanned):
    def build(self) -> None:
        table = self.centred("YT1", "YT2", ms(20, 30), ms(30, 45))
        marks = {"BT1": BACK, "BT2": (0.35, 0.44), "BT3": (0.5, 0.6), "BT4": END}
        self.cylinder(table, ms(800, 1000), ms(800, 1000), marks, overrun=ms(0, 60))

    def cycle(self, read: Read) -> Course:
        read = yield from self.step(read, on="YT1", until="BT2")
        read = yield from self.step(read, dwell=400, until=lambda: not self.plc.sees("BT3"))
        read = yield from self.step(read, on="YT1", until="BT4")
        return (yield from self.step(read, on="YT2", until="BT1"))


class Stamp(Station):
    SCAN, INPUT, OUTPUT = ms(4, 6), ms(2, 4), ms(0.5, 1)
    PULSES = 20.0, 60.0

    def build(self) -> None:
        stamp = self.bistable("YS1", "YS2", ms(12, 22))
        self.cylinder(stamp, ms(90, 130), ms(80, 120), {"BS1": BACK, "BS2": END})

    def cycle(self, read: Read) -> Course:
        out, back = self.PULSES
        read = yield from self.step(read, also=self.pulse("YS1", out), until="BS2")
        return (yield from self.step(read, also=self.pulse("YS2", back), until="BS1"))


class GlueStamp(Stamp):
    PULSES = 40.0, 40.0


class SawClamp(Scanned):
    def build(self) -> None:
        clamp = self.spring("YC1", ms(18, 28), ms(25, 40))
        late = {"BC2": ms(300, 350)}
        self.cylinder(clamp, ms(380, 450), ms(300, 360), {"BC1": BACK, "BC2": END}, late)

    def cycle(self, read: Read) -> Course:
        read = yield from self.step(read, also=self.set("YC1"), until="BC2")
        return (yield from self.step(read, also=self.reset("YC1"), until="BC1"))


class BottleRinser(Scanned):
    def build(self) -> None:
        self.coil("KW")

    def cycle(self, read: Read) -> Course:
        read = yield from self.step(read, on="KW", dwell=2000)
        return (yield from self.step(read, dwell=1000))


class CorkFeeder(OutAndBack):
    def cycle(self, read: Read) -> Course:
        read = yield from self.step(read, also=self.set("Y"), until="out")
        return (yield from self.step(read, also=self.reset("Y"), dwell=450))


class CrateScale(Scanned):
    def build(self) -> None:
        pan = self.spring("YP1", ms(18, 28), ms(25, 40))
        self.coil("KR")
        self.cylinder(pan, (*ms(380, 450), 440_000), ms(300, 360), {"BP1": BACK, "BP2": END})

    def cycle(self, read: Read) -> Course:
        read = yield from self.step(read, also=self.set("YP1"))
        read = yield from self.step(read, dwell=460)
        if self.plc.sees("BP2"):
            read = yield from self.step(read, dwell=300)
        else:
            read = yield from self.step(read, on="KR", dwell=500)
        return (yield from self.step(read, also=self.reset("YP1"), until="BP1"))


class FreshRinser(Scanned):
    """``lasted``: how long fill and drain valve were open together, each time."""

    def build(self) -> None:
        fill = Valve(self.env, self.draw, self.coil("MF1"), self.coil("MF2"), None, ms(900, 1200))
        drain = self.spring("YD1", ms(20, 40), ms(30, 60))
        shut, closed = fill.reached["b"], drain.reached["b"]
        self.lasted = Lasted(self.env, Derived(lambda: not shut.on and not closed.on, shut, closed)).times

    def cycle(self, read: Read) -> Course:
        read = yield from self.step(read, on="MF1", dwell=6000)
        self._hold("YD1", 1, read)
        read = yield from self.step(read, on="MF2", dwell=8000)
        self._hold("YD1", -1, read)
        return (yield from self.step(read, dwell=1000))


class LidGluer(Scanned):
    """``lasted``: from the glue gun on to the lid seen on, each time."""

    def build(self) -> None:
        lid = self.spring("YL1", ms(18, 28), ms(25, 40))
        gun = self.coil("KG")
        self.cylinder(lid, ms(900, 1300), ms(700, 900), {"BL1": BACK, "BL2": END})
        self.lasted: list[int] = []
        self._since = 0
        gun.tell.append(self._glue)

    def _glue(self, on: bool) -> None:
        if on:
            self._since = round(self.env.now)

    def cycle(self, read: Read) -> Course:
        read = yield from self.step(read, on="KG", dwell=200)
        read = yield from self.step(read, also=self.set("YL1"), until="BL2")
        self.lasted.append(read.time - self._since)
        read = yield from self.step(read, dwell=2000)
        return (yield from self.step(read, also=self.reset("YL1"), until="BL1"))


class BottleSorter(Scanned):
    """The lamp blinks beside, and nobody waits for it."""

    def build(self) -> None:
        flap = self.spring("Y1", ms(18, 28), ms(25, 40))
        self.coil("H1")
        self.cylinder(flap, ms(180, 220), ms(160, 200), {"B1": BACK, "B2": END})
        self.env.process(self._lamp())

    def cycle(self, read: Read) -> Course:
        read = yield from self.step(read, also=self.set("Y1"), until="B2")
        return (yield from self.step(read, also=self.reset("Y1"), until="B1"))

    def _lamp(self) -> Waits:
        read = yield from self.plc.start()
        while True:
            read = yield from self.step(read, on="H1", dwell=500)
            read = yield from self.step(read, dwell=500)
