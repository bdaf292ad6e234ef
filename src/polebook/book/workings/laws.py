"""The d.c. laws of the devices with the numbers of their cards put in."""

from __future__ import annotations

from polebook.book.workings.sheet import Books, Sheet
from polebook.circuit.bias_laws import reading
from polebook.devices import bjt, fet, triode


def control_drop(books: Books, page: Sheet, family: str, card: str, owner: str) -> str:
    """Enters what the law puts between control and lower terminal, as for an n-type; "" where the card tells not."""
    if family == "bjt":
        page.file("vbe_25", f"device.{card}.vbe")
        page.file("T", "supply.temperature", "temperature of every part")
        return page.step(bjt.VBE.text, "V", "at this temperature:")
    if books.value(f"{owner}.current_a") is None:
        return ""
    current = page.figure("I", f"{owner}.current_a")
    return _triode(books, page, card, owner, current) if family == "triode" else _fet(books, page, card, owner, current)


def _triode(books: Books, page: Sheet, card: str, owner: str, current: str) -> str:
    numbers = reading(card, books.chain.numbers.get)
    told = triode.amplification(numbers) is not None and triode.measured_gm(numbers) is not None
    if not told or books.value(f"{owner}.across_v") is None:
        return ""
    p, mu = perveance(books, page, card, owner)
    vak = page.figure("vak", f"{owner}.across_v")
    return page.step(f"vgk = ({current}/{p})^(2/3) - {vak}/{mu}", "V", "grid to cathode by the law:")


def _fet(books: Books, page: Sheet, card: str, owner: str, current: str) -> str:
    numbers, told = reading(card, books.chain.numbers.get), "gate to source by the law:"
    if fet.strength(numbers, books.value(f"{owner}.current_a")) is None:
        return ""
    if idss(books, page, card, owner):
        return page.step(f"vgs = vgs_off·(sqrt({current}/idss) - 1)", "V", told)
    for key, sign in (("vgs_th", ""), ("vgs_off", "-")):
        if numbers(key) is not None:
            k, off = strength(books, page, card, owner), page.file(key, f"device.{card}.{key}")
            return page.step(f"vgs = {sign}{off} + sqrt(2·{current}/{k})", "V", told)
    return ""


def strength(books: Books, page: Sheet, card: str, owner: str) -> str:
    """Enters k of the square law; without a current of its own, gm was measured at the quiescent one."""
    prefix = f"device.{card}."
    if f"{prefix}k" in books.chain.numbers:
        return page.file("k", f"{prefix}k")
    page.file("gm_0", f"{prefix}gm")
    if f"{prefix}gm_id" in books.chain.numbers:
        page.file("gm_id", f"{prefix}gm_id")
    else:
        page.figure("gm_id", f"{owner}.current_a", "taken as measured at the quiescent current")
    return page.step(fet.K_MEASURED.text, "A/V²", "from gm as it was measured:")


def idss(books: Books, page: Sheet, card: str, owner: str) -> bool:
    """Enters idss and vgs_off of a junction fet, the latter by gm as it was measured where the card has none."""
    prefix = f"device.{card}."
    if f"{prefix}idss" not in books.chain.numbers:
        return False
    page.file("idss", f"{prefix}idss")
    if f"{prefix}vgs_off" in books.chain.numbers:
        page.file("vgs_off", f"{prefix}vgs_off")
    elif f"{prefix}gm" in books.chain.numbers:
        strength(books, page, card, owner)
        page.step(fet.VGS_OFF.text, "V", "what cuts it off:")
    else:
        return False
    return True


def perveance(books: Books, page: Sheet, card: str, owner: str) -> tuple[str, str]:
    """Enters P and mu of a triode."""
    prefix = f"device.{card}."
    stands = books.chain.numbers
    if f"{prefix}mu" in stands:
        mu = page.file("mu", f"{prefix}mu")
        if f"{prefix}gm" in stands:
            page.file("gm_0", f"{prefix}gm")
        else:
            page.file("rp", f"{prefix}rp")
            page.step(triode.GM_MEASURED.text, "S", "as measured:")
    else:
        page.file("gm_0", f"{prefix}gm")
        page.file("rp", f"{prefix}rp")
        mu = page.step(triode.MU.text, "", "amplification factor:")
    if f"{prefix}gm_ia" in stands:
        page.file("gm_ia", f"{prefix}gm_ia")
    else:
        page.figure("gm_ia", f"{owner}.current_a", "taken as measured at the quiescent current")
    return page.step(triode.PERVEANCE.text, "A/V^1.5", "what the law takes:"), mu
