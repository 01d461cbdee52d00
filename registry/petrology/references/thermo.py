"""Sources of the liquidus, saturation, melt, ascent, heat and melting models."""

from __future__ import annotations

REFERENCES = {
    "convention": "Convention of this register: common practice, no published source.",
    "lemaitre2002": "Le Maitre, R.W. (ed.) 2002. Igneous Rocks: a Classification and Glossary of Terms, 2nd edition. "
    "Cambridge University Press.",
    "roeder1970": "Roeder, P.L., Emslie, R.F. 1970. Olivine-liquid equilibrium. "
    "Contributions to Mineralogy and Petrology 29, 275-289.",
    "helz1987": "Helz, R.T., Thornber, C.R. 1987. Geothermometry of Kilauea Iki lava lake, Hawaii. "
    "Bulletin of Volcanology 49, 651-668.",
    "montierth1995": "Montierth, C., Johnston, A.D., Cashman, K.V. 1995. An empirical glass-composition-based "
    "geothermometer for Mauna Loa lavas. American Geophysical Union Monograph 92, 207-217.",
    "putirka2008": "Putirka, K.D. 2008. Thermometers and barometers for volcanic systems. "
    "Reviews in Mineralogy and Geochemistry 69, 61-120.",
    "beattie1993": "Beattie, P. 1993. Olivine-melt and orthopyroxene-melt equilibria. "
    "Contributions to Mineralogy and Petrology 115, 103-111.",
    "sugawara2000": "Sugawara, T. 2000. Empirical relationships between temperature, pressure, and MgO content in "
    "olivine and pyroxene saturated liquid. Journal of Geophysical Research 105, 8457-8472.",
    "makhluf2017": "Makhluf, A.R., Newton, R.C., Manning, C.E. 2017. Experimental investigation of phase relations in "
    "the system NaAlSi3O8-KAlSi3O8-SiO2-H2O at high temperatures and pressures: liquidus relations, liquidus mineral "
    "compositions, and activity of H2O in liquids at 10 kbar. Contributions to Mineralogy and Petrology 172.",
    "duan2022": "Duan et al. 2022. Mineralogy and Petrology 116, 93-103 (abstract seen).",
    "medard2008": "Medard, E., Grove, T.L. 2008. The effect of H2O on the olivine liquidus of basaltic melts: "
    "experiments and thermodynamic models. Contributions to Mineralogy and Petrology 155, 417-432.",
    "falloon2000": "Falloon, T.J., Danyushevsky, L.V. 2000. Melting of refractory mantle at 1.5, 2 and 2.5 GPa under "
    "anhydrous and H2O-undersaturated conditions. Journal of Petrology 41, 257-283.",
    "almeev2007": "Almeev, R.R., Holtz, F., Koepke, J., Parat, F., Botcharnikov, R.E. 2007. The effect of H2O on "
    "olivine crystallization in MORB: experimental calibration at 200 MPa. American Mineralogist 92, 670-674.",
    "watson1983": "Watson, E.B., Harrison, T.M. 1983. Zircon saturation revisited: temperature and composition effects "
    "in a variety of crustal magma types. Earth and Planetary Science Letters 64, 295-304.",
    "boehnke2013": "Boehnke, P., Watson, E.B., Trail, D., Harrison, T.M., Schmitt, A.K. 2013. Zircon saturation "
    "re-revisited. Chemical Geology 351, 324-334.",
    "shao2020": "Shao, T., Xia, Y., Ding, X., Cai, Y., Song, M. 2020. Zircon saturation model in silicate melts: a "
    "review and update. Acta Geochimica.",
    "hfse2022": "Minerals 2022, 12, 1260: thermometers of granitic and alkaline melts from high field strength "
    "elements (abstract seen; authors not noted).",
    "harrison1984": "Harrison, T.M., Watson, E.B. 1984. The behavior of apatite during crustal anatexis: equilibrium "
    "and kinetic considerations. Geochimica et Cosmochimica Acta 48, 1467-1477.",
    "watson1980": "Watson, E.B. 1980. Apatite and phosphorus in mantle source regions: an experimental study of "
    "apatite/melt equilibria at pressures to 25 kbar. Earth and Planetary Science Letters 51, 322-335.",
    "bea1992": "Bea, F., Fershtater, G., Corretge, L.G. 1992. The geochemistry of phosphorus in granite rocks and the "
    "effect of aluminium. Lithos 29, 43-56.",
    "pichavant1992": "Pichavant, M., Montel, J.M., Richard, L.R. 1992. Apatite solubility in peraluminous liquids: "
    "experimental data and an extension of the Harrison-Watson model. Geochimica et Cosmochimica Acta 56, 3855-3861.",
    "montel1993": "Montel, J.M. 1993. A model for monazite/melt equilibrium and application to the generation of "
    "granitic magmas. Chemical Geology 110, 127-146.",
    "maimaiti2019": "Maimaiti et al. 2019. European Journal of Mineralogy 31, 49-59 (abstract seen).",
    "lange1987": "Lange, R.A., Carmichael, I.S.E. 1987. Densities of Na2O-K2O-CaO-MgO-FeO-Fe2O3-Al2O3-TiO2-SiO2 "
    "liquids: new measurements and derived partial molar properties. Geochimica et Cosmochimica Acta 51, 2931-2946.",
    "lange1990": "Lange, R.A., Carmichael, I.S.E. 1990. Thermodynamic properties of silicate liquids with emphasis on "
    "density, thermal expansion and compressibility. Reviews in Mineralogy 24, 25-64.",
    "lange1997": "Lange, R.A. 1997. A revised model for the density and thermal expansivity of "
    "K2O-Na2O-CaO-MgO-Al2O3-SiO2 liquids from 700 to 1900 K: extension to crustal magmatic temperatures. "
    "Contributions to Mineralogy and Petrology 130, 1-11.",
    "ochs1999": "Ochs, F.A., Lange, R.A. 1999. The density of hydrous magmatic liquids. Science 283, 1314-1317.",
    "giordano2008": "Giordano, D., Russell, J.K., Dingwell, D.B. 2008. Viscosity of magmatic liquids: a model. "
    "Earth and Planetary Science Letters 271, 123-134.",
    "shaw1972": "Shaw, H.R. 1972. Viscosities of magmatic silicate liquids: an empirical method of prediction. "
    "American Journal of Science 272, 870-893.",
    "roscoe1952": "Roscoe, R. 1952. The viscosity of suspensions of rigid spheres. "
    "British Journal of Applied Physics 3, 267-269.",
    "marsh1981": "Marsh, B.D. 1981. On the crystallinity, probability of occurrence, and rheology of lava and magma. "
    "Contributions to Mineralogy and Petrology 78, 85-98.",
    "mueller2011": "Mueller, S., Llewellin, E.W., Mader, H.M. 2011. The effect of particle shape on suspension "
    "viscosity and implications for magmatic flows. Geophysical Research Letters 38, L13316.",
    "stokes1851": "Stokes, G.G. 1851. On the effect of the internal friction of fluids on the motion of pendulums. "
    "Transactions of the Cambridge Philosophical Society 9, 8-106.",
    "turcotte2002": "Turcotte, D.L., Schubert, G. 2002. Geodynamics, 2nd edition. Cambridge University Press.",
    "rybach1988": "Rybach, L. 1988. Determination of heat production rate. In Haenel, R., Rybach, L., Stegena, L. "
    "(eds), Handbook of Terrestrial Heat-Flow Density Determination. Kluwer, Dordrecht, 125-142.",
    "wangen2010": "Wangen, M. 2010. Physical Principles of Sedimentary Basin Analysis. Cambridge University Press, "
    "p. 131.",
    "lachenbruch1970": "Lachenbruch, A.H. 1970. Crustal temperature and heat production: implications of the linear "
    "heat-flow relation. Journal of Geophysical Research 75, 3291-3300.",
    "jaeger1964": "Jaeger, J.C. 1964. Thermal effects of intrusions. Reviews of Geophysics 2, 443-466.",
    "crank1975": "Crank, J. 1975. The Mathematics of Diffusion, 2nd edition. Clarendon Press, Oxford.",
    "carslaw1959": "Carslaw, H.S., Jaeger, J.C. 1959. Conduction of Heat in Solids, 2nd edition. "
    "Clarendon Press, Oxford.",
    "steele2014": "Steele, G.L., Lea, D., Flood, C.H. 2014. Fast splittable pseudorandom number generators. "
    "Proceedings of OOPSLA 2014, ACM, 453-472.",
    "boxmuller1958": "Box, G.E.P., Muller, M.E. 1958. A note on the generation of random normal deviates. Annals of "
    "Mathematical Statistics 29, 610-611.",
    "abramowitz1964": "Abramowitz, M., Stegun, I.A. (eds) 1964. Handbook of Mathematical Functions. "
    "National Bureau of Standards Applied Mathematics Series 55.",
    "hirschmann2000": "Hirschmann, M.M. 2000. Mantle solidus: experimental constraints and the effects of peridotite "
    "composition. Geochemistry, Geophysics, Geosystems 1, 2000GC000070.",
    "hirschmann2009": "Hirschmann, M.M., Tenner, T., Aubaud, C., Withers, A.C. 2009. Dehydration melting of nominally "
    "anhydrous mantle: the primacy of partitioning. Physics of the Earth and Planetary Interiors 176, 54-68.",
    "katz2003": "Katz, R.F., Spiegelman, M., Langmuir, C.H. 2003. A new parameterization of hydrous mantle melting. "
    "Geochemistry, Geophysics, Geosystems 4, 1073.",
    "stern1973": "Stern, C.R., Wyllie, P.J. 1973. Water-saturated and undersaturated melting relations of a granite to "
    "35 kilobars. "
    "Earth and Planetary Science Letters 18, 163-167.",
    "johannes1996": "Johannes, W., Holtz, F. 1996. Petrogenesis and Experimental Petrology of Granitic Rocks. "
    "Springer, Berlin.",
    "tuttle1958": "Tuttle, O.F., Bowen, N.L. 1958. Origin of granite in the light of experimental studies in the "
    "system NaAlSi3O8-KAlSi3O8-SiO2-H2O. Geological Society of America Memoir 74.",
    "shaw1970": "Shaw, D.M. 1970. Trace element fractionation during anatexis. "
    "Geochimica et Cosmochimica Acta 34, 237-243.",
    "rayleigh1896": "Rayleigh, Lord 1896. Theoretical considerations respecting the separation of gases by diffusion "
    "and similar processes. Philosophical Magazine 42, 493-498.",
    "bryan1969": "Bryan, W.B., Finger, L.W., Chayes, F. 1969. Estimating proportions in petrographic mixing equations "
    "by least-squares approximation. Science 163, 926-927.",
    "lawson1974": "Lawson, C.L., Hanson, R.J. 1974. Solving Least Squares Problems. Prentice-Hall, Englewood Cliffs.",
}
