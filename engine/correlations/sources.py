"""The publications that the relations and figures come from, each written once.

`checked` is True only where the printed page was compared with the formula here.
"""

from __future__ import annotations

from engine.correlations import Source

VDI_G1 = Source(
    key="VDI-G1",
    text="Gnielinski, V., Heat transfer in pipe flow, in: VDI Heat Atlas, 2nd ed., Springer 2010, section G1",
    checked=False,
)
VDI_G2 = Source(
    key="VDI-G2",
    text="Gnielinski, V., Heat transfer in concentric annular and parallel plate ducts, in: VDI Heat Atlas, 2nd ed., "
    "Springer 2010, section G2",
    checked=False,
)
GNIELINSKI_1976 = Source(
    key="Gnielinski-1976",
    text="Gnielinski, V., New equations for heat and mass transfer in turbulent pipe and channel flow, "
    "Int. Chem. Eng. 16 (1976) 359-368",
    checked=False,
)
GNIELINSKI_2009 = Source(
    key="Gnielinski-2009",
    text="Gnielinski, V., Heat transfer coefficients for turbulent flow in concentric annular ducts, "
    "Heat Transfer Eng. 30 (2009) 431-436",
    checked=False,
)
GNIELINSKI_2013 = Source(
    key="Gnielinski-2013",
    text="Gnielinski, V., On heat transfer in tubes, Int. J. Heat Mass Transfer 63 (2013) 134-140",
    checked=False,
)
KONAKOV_1946 = Source(
    key="Konakov-1946",
    text="Konakov, P. K., A new correlation for the friction coefficient in smooth tubes, "
    "Dokl. Akad. Nauk SSSR 51 (1946) 503-506, as used in VDI Heat Atlas, 2nd ed. 2010, section G1",
    checked=False,
)
PETUKHOV_1970 = Source(
    key="Petukhov-1970",
    text="Petukhov, B. S., Heat transfer and friction in turbulent pipe flow with variable physical properties, "
    "Adv. Heat Transfer 6 (1970) 503-564",
    checked=False,
)
DITTUS_BOELTER_1930 = Source(
    key="Dittus-Boelter-1930",
    text="Dittus, F. W., Boelter, L. M. K., Univ. Calif. Publ. Eng. 2 (1930) 443-461, in the form of McAdams, "
    "Heat Transmission, 2nd ed., McGraw-Hill 1942",
    checked=False,
)
SIEDER_TATE_1936 = Source(
    key="Sieder-Tate-1936",
    text="Sieder, E. N., Tate, G. E., Heat transfer and pressure drop of liquids in tubes, "
    "Ind. Eng. Chem. 28 (1936) 1429-1435",
    checked=False,
)
HAUSEN_1943 = Source(
    key="Hausen-1943",
    text="Hausen, H., VDI-Z. Beih. Verfahrenstechnik 4 (1943) 91-98, as given by Incropera et al., Fundamentals of "
    "Heat and Mass Transfer, 6th ed., Eq. 8.56",
    checked=False,
)
SHAH_LONDON_1978 = Source(
    key="Shah-London-1978",
    text="Shah, R. K., London, A. L., Laminar Flow Forced Convection in Ducts, Academic Press 1978",
    checked=False,
)
KAYS_CRAWFORD = Source(
    key="Kays-Crawford",
    text="Kays, W. M., Crawford, M. E., Convective Heat and Mass Transfer, 3rd ed., McGraw-Hill 1993, "
    "chapter on variable fluid properties",
    checked=False,
)
LIENHARD = Source(
    key="Lienhard",
    text="Lienhard, J. H. IV, Lienhard, J. H. V, A Heat Transfer Textbook, section 7.3",
    checked=False,
)
CHURCHILL_1977 = Source(
    key="Churchill-1977",
    text="Churchill, S. W., Friction-factor equation spans all fluid-flow regimes, Chem. Eng. 84 (24) (1977) 91-92",
    checked=False,
)
COLEBROOK_1939 = Source(
    key="Colebrook-1939",
    text="Colebrook, C. F., Turbulent flow in pipes, J. Inst. Civ. Eng. 11 (1939) 133-156",
    checked=False,
)
HAALAND_1983 = Source(
    key="Haaland-1983",
    text="Haaland, S. E., Simple and explicit formulas for the friction factor in turbulent pipe flow, "
    "J. Fluids Eng. 105 (1983) 89-90",
    checked=False,
)
HAGEN_POISEUILLE = Source(
    key="Hagen-Poiseuille",
    text="Exact solution for developed laminar flow in a round tube (Hagen 1839, Poiseuille 1841)",
    checked=True,
)
LAMINAR_ANNULUS_FRICTION = Source(
    key="White-6.3",
    text="Exact solution for developed laminar flow in a concentric annulus; White, F. M., Fluid Mechanics, 4th ed., "
    "Table 6.3",
    checked=True,
)
LAMINAR_ANNULUS_HEAT = Source(
    key="annulus-eigenvalue",
    text="Lowest eigenvalue of the energy equation for developed laminar flow, inner wall isothermal, outer wall "
    "adiabatic; agrees with Incropera et al., Fundamentals of Heat and Mass Transfer, Table 8.2 (after Kays & "
    "Perkins 1972)",
    checked=True,
)
HARPER_BROWN_1922 = Source(
    key="Harper-Brown-1922",
    text="Harper, D. R., Brown, W. B., Mathematical equations for heat conduction in the fins of air-cooled engines, "
    "NACA Report 158 (1922)",
    checked=False,
)
KERN_1950 = Source(key="Kern-1950", text="Kern, D. Q., Process Heat Transfer, McGraw-Hill 1950", checked=False)
SINNOTT_2005 = Source(
    key="Sinnott-2005",
    text="Sinnott, R. K., Chemical Engineering Design (Coulson & Richardson vol. 6), 4th ed. 2005, section 12.8",
    checked=False,
)
MOODY_1944 = Source(
    key="Moody-1944",
    text="Moody, L. F., Friction factors for pipe flow, Trans. ASME 66 (1944) 671-684",
    checked=False,
)
COMMON_PRACTICE = Source(key="common-practice", text="Common practice", checked=False)
