"""The invented customers and cars; none of them exists."""

from __future__ import annotations

from dataclasses import dataclass

SUPPLIER = "Halden Gas Supply"
MAKERS = ("Tollmark Vessels", "Quellin Pressings", "Varnholt Cylinders")
TEST_HOUSE = "Orsova Test Station"


@dataclass(frozen=True, slots=True)
class Someone:
    """A customer: their answer to being filled for (None: never asked)."""

    name: str
    phone: str
    consent: bool | None = True
    note: str = ""

    @property
    def email(self) -> str:
        """An address at a domain that is kept free for examples."""
        return f"{self.name.split()[0].casefold()}@example.org"


@dataclass(frozen=True, slots=True)
class Wheels:
    """A car; without an owner it's the shop's."""

    number: str
    car_class: str
    description: str
    engine: str
    owner: str = ""


CUSTOMERS = (
    Someone("Amara Delacroix-Nwosu", "555-0101", note="Calls ahead; races on Saturdays."),
    Someone("Bartek Szelmowski", "555-0102"),
    Someone("Chiara Montefalk", "555-0103"),
    Someone("Dmitri Averolsky", "555-0104"),
    Someone("Elif Karadursun", "555-0105"),
    Someone("Fergus MacAldrith", "555-0106"),
    Someone("Giulia Sartorell", "555-0107"),
    Someone("Hiroto Kanemizu", "555-0108"),
    Someone("Ioana Petreval", "555-0109"),
    Someone("Jamal Whitterby", "555-0110"),
    Someone("Katrin Osterlohe", "555-0111"),
    Someone("Lindiwe Mokwayo", "555-0112"),
    Someone("Mateo Quintarosa", "555-0113"),
    Someone("Nils Fagerholt", "555-0114"),
    Someone("Oyelaran Adebisko", "555-0115"),
    Someone("Priya Venkatamma", "555-0116"),
    Someone("Quentin Lavoisel", "555-0117", None, "Not asked yet whether we may fill for him."),
    Someone("Rosalind Thackeraw", "555-0118", False, "Wants to be asked before each fill."),
    Someone("Sefa Taumaloto", "555-0119"),
    Someone("Tereza Novotmyer", "555-0120"),
    Someone("Umar Farouqi-Lund", "555-0121"),
    Someone("Viktor Dragomesh", "555-0122"),
    Someone("Wen Xiaolanti", "555-0123"),
    Someone("Ysolde Brannagh", "555-0124"),
    Someone("Zuri Achterholm", "555-0125"),
    Someone("Pellworth Hauling & Racing", "555-0126", note="A firm; three cars, one driver each."),
)

CARS = (
    Wheels("11", "Sprint", "red saloon, tube frame", "5.7 L V8, one plate stage", "Amara Delacroix-Nwosu"),
    Wheels("23", "Sprint", "white coupé", "4.6 L V8, one plate stage", "Bartek Szelmowski"),
    Wheels("34", "Street", "grey hatchback", "2.0 L four, one nozzle", "Chiara Montefalk"),
    Wheels("48", "Open", "blue dragster", "8.2 L V8, two direct port stages", "Dmitri Averolsky"),
    Wheels("52", "Street", "green estate", "2.5 L five, one nozzle", "Elif Karadursun"),
    Wheels("61", "Sprint", "black pick-up", "6.2 L V8, one plate stage", "Fergus MacAldrith"),
    Wheels("77", "Open", "yellow roadster", "7.4 L V8, direct port", "Giulia Sartorell"),
    Wheels("81", "Street", "silver coupé", "3.0 L six, one nozzle", "Hiroto Kanemizu"),
    Wheels("90", "Sprint", "orange saloon", "5.0 L V8, one plate stage", "Ioana Petreval"),
    Wheels("102", "Open", "bare-metal altered", "9.4 L V8, three stages", "Jamal Whitterby"),
    Wheels("115", "Street", "brown fastback", "3.8 L V6, one nozzle", "Katrin Osterlohe"),
    Wheels("127", "Sprint", "purple coupé", "5.7 L V8, one plate stage", "Lindiwe Mokwayo"),
    Wheels("138", "Street", "white kei-size hatchback", "0.7 L three, one nozzle", "Mateo Quintarosa"),
    Wheels("146", "Sprint", "navy saloon", "6.0 L V8, direct port", "Nils Fagerholt"),
    Wheels("159", "Open", "front-engined dragster", "8.2 L V8, two stages", "Oyelaran Adebisko"),
    Wheels("163", "Street", "maroon liftback", "2.3 L four, one nozzle", "Priya Venkatamma"),
    Wheels("201", "Sprint", "hauler's first car", "5.3 L V8, one plate stage", "Pellworth Hauling & Racing"),
    Wheels("202", "Sprint", "hauler's second car", "5.3 L V8, one plate stage", "Pellworth Hauling & Racing"),
    Wheels("203", "Open", "hauler's third car", "7.0 L V8, direct port", "Pellworth Hauling & Racing"),
    Wheels("1", "Open", "the shop's own test car", "7.0 L V8, plate and direct port"),
    Wheels("2", "Street", "the shop's loan car", "5.0 L V8, one plate stage"),
)
