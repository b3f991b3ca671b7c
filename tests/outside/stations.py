"""The example machines as somebody would model them in simpy: from the texts alone, their numbers typed by hand."""

from __future__ import annotations

from tests.outside.controllers import Read
from tests.outside.plant import Derived, Valve, Waits, ms
from tests.outside.station import Course, Station

END = (1.0, 1.0)
BACK = (0.0, 0.0)


class Scanned(Station):
    """The controller of most examples."""

    SCAN, INPUT, OUTPUT = ms(8, 12), ms(2, 4), ms(0.5, 1)


class CrateStapler(Scanned):
    def build(self) -> None:
        clamp = self.spring("Y1", ms(18, 28), ms(25, 40))
        lift = self.centred("Y2", "Y3", ms(20, 30), ms(30, 45))
        stapler = self.bistable("Y4", "Y5", ms(12, 20))
        self.coil("K1")
        self.cylinder(clamp, ms(380, 450), ms(300, 360), {"B1": BACK, "B2": END})
        ends = {"B3": (0, 0.04), "B4": (0.96, 1)}
        self.cylinder(lift, ms(600, 700), ms(500, 620), ends, lag=ms(20, 40), uneven=0.1)
        self.cylinder(stapler, ms(90, 130), ms(80, 120), {"B5": BACK, "B6": END})

    def cycle(self, read: Read) -> Course:
        read = yield from self.outside(read)
        read = yield from self.step(read, also=self.set("Y1"), until="B2")
        read = yield from self.step(read, on="Y2", until="B4")
        for _ in range(2):
            read = yield from self.step(read, also=self.pulse("Y4", 60), until="B6")
            read = yield from self.step(read, also=self.pulse("Y5", 60), until="B5")
        read = yield from self.step(read, dwell=50)
        read = yield from self.step(read, on="Y3", until="B3")
        clamp = self.step(read, also=self.reset("Y1"), until="B1")
        return (yield from self.together(read, clamp, self.step(read, on="K1", dwell=600)))


class TilePress(Station):
    TASK, RUN, INPUT, OUTPUT = ms(10), ms(1, 3), ms(2, 4), ms(0.2, 0.5)

    def build(self) -> None:
        ram = self.centred("YR1", "YR2", ms(45, 70), ms(40, 65))
        self.spring("YH1", ms(30, 50), ms(40, 60))
        box = self.centred("YF1", "YF2", ms(35, 60), ms(35, 55))
        ejector = self.spring("YE1", ms(35, 60), ms(45, 70))
        self.coil("H1")
        marks = {"BR1": BACK, "BR2": (0.6, 0.72), "BR3": (0.97, 1)}
        lag, overrun = ms(15, 30), ms(5, 20)
        self.cylinder(ram, ms(1400, 1700), ms(1100, 1350), marks, lag=lag, uneven=0.12, overrun=overrun)
        ends = {"BF1": (0, 0.02), "BF2": (0.98, 1)}
        self.cylinder(box, ms(900, 1100), ms(850, 1050), ends, lag=ms(10, 25), uneven=0.05)
        self.cylinder(ejector, ms(260, 330), ms(240, 310), {"BE1": BACK, "BE2": END})

    def cycle(self, read: Read) -> Course:
        read = yield from self.outside(read)
        read = yield from self.step(read, on="YF1", until="BF2")
        read = yield from self.step(read, dwell=400)
        read = yield from self.step(read, on="YF2", until="BF1")
        read = yield from self.step(read, on="YR1", until="BR2")
        read = yield from self.step(read, also=self.set("YH1"), until="BR2", dwell=120)
        read = yield from self.step(read, on="YR1", until="BR3")
        read = yield from self.step(read, on="YR1", dwell=800)
        read = yield from self.step(read, also=self.reset("YH1"), dwell=150)
        read = yield from self.step(read, on="YR2", until="BR1")
        return (yield from self.together(read, self._eject(read), self.step(read, on="H1", dwell=100)))

    def _eject(self, read: Read) -> Course:
        read = yield from self.step(read, also=self.set("YE1"), until="BE2")
        return (yield from self.step(read, also=self.reset("YE1"), until="BE1"))


class BinShaker(Station):
    SCAN, INPUT, OUTPUT = ms(4, 6), ms(2, 4), ms(0.5, 1)

    def build(self) -> None:
        ram = self.spring("YR", ms(12, 18), ms(15, 25))
        slide = self.spring("YS", ms(15, 22), ms(18, 30))
        self.cylinder(ram, ms(200, 260), ms(180, 240), {"BR": BACK})
        self.cylinder(slide, ms(300, 380), ms(280, 350), {"BS1": BACK, "BS2": END})

    def cycle(self, read: Read) -> Course:
        read = yield from self.outside(read)
        for _ in range(3):
            read = yield from self.step(read, also=self.set("YR"), dwell=90)
            read = yield from self.step(read, also=self.reset("YR"), until="BR")
        read = yield from self.step(read, also=self.set("YS"), until="BS2")
        return (yield from self.step(read, also=self.reset("YS"), until="BS1"))


class RinseSkid(Station):
    """The stirrer's sequence runs beside. The water is cloudy now and then: never where all times are least, typical or
    greatest. ``rounds``: how often each cycle fills and drains the vessel."""

    PATIENCE = 900_000_000
    TASK, RUN, INPUT, OUTPUT = ms(20), ms(2, 6), ms(2, 4), ms(0.5, 1)
    RACK = ms(2, 8), ms(1, 2)

    def build(self) -> None:
        m1, m2, y1, y2 = (self.coil(name, *self.RACK) for name in ("M1", "M2", "Y1", "Y2"))
        fill = Valve(self.env, self.draw, m1, m2, None, ms(900, 1200))
        drain = Valve(self.env, self.draw, y1, None, "b", ms(20, 40), ms(30, 60))
        vent = Valve(self.env, self.draw, y2, None, "b", ms(20, 40), ms(30, 60))
        self.coil("pump")
        shut, closed, no_vent = fill.reached["b"], drain.reached["b"], vent.reached["a"]
        self.follows("dosed", Derived(lambda: not shut.on, shut), ms(8_000, 11_000), ms(100, 300))
        running_out = Derived(lambda: not closed.on and not no_vent.on, closed, no_vent)
        self.follows("low", running_out, ms(5_000, 8_000), ms(200, 500))
        self.rounds: list[int] = []
        self.env.process(self._stirrer())

    def cycle(self, read: Read) -> Course:
        read = yield from self.outside(read)
        self.rounds.append(0)
        cloudy = True
        while cloudy:
            self.rounds[-1] += 1
            read = yield from self.step(read, on="M1", until="dosed")
            read = yield from self.step(read, on="M2", dwell=1500)
            self.plc.remember("stir", True, read)
            read = yield from self.step(read, until=lambda: self.plc.knows("stirred"))
            self.plc.remember("stir", False, read)
            self.plc.remember("stirred", False, read)
            read = yield from self.step(read, on="Y1", until="low")
            read = yield from self.step(read, dwell=300)
            cloudy = self.draw((0, 3)) == 2
        return (yield from self.step(read, on="Y2", dwell=1000))

    def _stirrer(self) -> Waits:
        read = yield from self.plc.start()
        while True:
            read = yield from self.step(read, until=lambda: self.plc.knows("stir"))
            read = yield from self.step(read, on="pump", dwell=4000)
            self.plc.remember("stirred", True, read)
            read = yield from self.step(read, until=lambda: not self.plc.knows("stir"))


class LiftBefore(Scanned):
    CLAMP = ms(18, 28)

    def build(self) -> None:
        clamp = self.spring("YC1", self.CLAMP, ms(25, 40))
        lift = self.centred("YL1", "YL2", ms(20, 30), ms(30, 45))
        self.cylinder(clamp, ms(380, 450), ms(300, 360), {"BC1": BACK, "BC2": END})
        self.cylinder(lift, ms(600, 700), ms(500, 620), {"BL1": BACK, "BL2": END})

    def cycle(self, read: Read) -> Course:
        read = yield from self.step(read, also=self.set("YC1"), until="BC2")
        read = yield from self.step(read, on="YL1", until="BL2")
        read = yield from self.rest(read)
        read = yield from self.step(read, on="YL2", until="BL1")
        return (yield from self.step(read, also=self.reset("YC1"), until="BC1"))

    def rest(self, read: Read) -> Course:
        return read
        yield


class LiftAfter(LiftBefore):
    CLAMP = ms(18, 40)

    def rest(self, read: Read) -> Course:
        return (yield from self.step(read, dwell=100))
