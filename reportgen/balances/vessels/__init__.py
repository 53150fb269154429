r"""Vessels that are charged and discharged: a rigid volume whose content is followed while mass enters or leaves.

    V dρ/dt = ±ṁ ,   V d(ρu)/dt = ±ṁ h_port + Q̇ ,   m_w c dT_w/dt = −Q̇ ,   Q̇ = α A (T_w − T)

A vessel is no part of the network of relations: it begins with states that the network has solved, and nothing in the
network depends on it. ``kinds`` declares what a calculation file may say; ``definitions`` turns that into arrays along
the sample axis; ``following`` integrates all columns together with ``march``, through the two-phase region; ``orifice``
gives the flow that lets time pass; ``paths`` integrates what follows from the path; ``accounting`` enters results.
"""

__all__ = ["PREFIX"]

#: Beginning of the paths of vessels: what is given there is no quantity of the network.
PREFIX = "vessels."
