"""Sources of the indices, trace ratios, alteration indices, classifications and the redox of the rock.

Citations are from memory; volume and pages of most were seen in abstracts.
"""

from __future__ import annotations

REFERENCES = {
    "thornton1960": "Thornton, C.P., Tuttle, O.F. 1960. Chemistry of igneous rocks, I. Differentiation index. "
    "American Journal of Science 258, 664-684.",
    "kuno1959": "Kuno, H. 1959. Origin of Cenozoic petrographic provinces of Japan and surrounding areas. "
    "Bulletin Volcanologique 20, 37-76.",
    "larsen1938": "Larsen, E.S. 1938. Some new variation diagrams for groups of igneous rocks. "
    "Journal of Geology 46, 505-520.",
    "poldervaart1964": "Poldervaart, A., Parker, A.B. 1964. The crystallization index as a parameter of igneous "
    "differentiation in binary variation diagrams. American Journal of Science 262, 281-289.",
    "simpson1954": "Simpson, E.S.W. 1954. On the graphical representation of differentiation trends in igneous rocks. "
    "Geological Magazine 91, 238-244.",
    "wager1939": "Wager, L.R., Deer, W.A. 1939. Geological investigations in East Greenland, part III: the petrology "
    "of the Skaergaard intrusion, Kangerdlugssuaq. Meddelelser om Groenland 105 (4), 1-352.",
    "delaroche1980": "De la Roche, H., Leterrier, J., Grandclaude, P., Marchal, M. 1980. A classification of volcanic "
    "and plutonic rocks using R1R2-diagram and major-element analyses. Chemical Geology 29, 183-210.",
    "streckeisen1979": "Streckeisen, A., Le Maitre, R.W. 1979. A chemical approximation to the modal QAPF "
    "classification of the igneous rocks. Neues Jahrbuch fuer Mineralogie, Abhandlungen 136, 169-206.",
    "rittmann1957": "Rittmann, A. 1957. On the serial character of igneous rocks. "
    "Egyptian Journal of Geology 1, 23-48.",
    "peacock1931": "Peacock, M.A. 1931. Classification of igneous rock series. Journal of Geology 39, 54-67.",
    "shand1943": "Shand, S.J. 1943. Eruptive Rocks, 2nd edition. Wiley, New York.",
    "zen1988": "Zen, E-an 1988. Phase relations of peraluminous granitic rocks and their petrogenetic implications. "
    "Annual Review of Earth and Planetary Sciences 16, 21-51.",
    "frost2001": "Frost, B.R., Barnes, C.G., Collins, W.J., Arculus, R.J., Ellis, D.J., Frost, C.D. 2001. "
    "A geochemical classification for granitic rocks. Journal of Petrology 42, 2033-2048.",
    "frost2008": "Frost, B.R., Frost, C.D. 2008. A geochemical classification for feldspathic igneous rocks. "
    "Journal of Petrology 49, 1955-1969.",
    "liegeois1987": "Liegeois, J.P., Black, R. 1987. Alkaline magmatism subsequent to collision in the Pan-African "
    "belt of the Adrar des Iforas (Mali). Geological Society, London, Special Publications 30, 381-401.",
    "mcdonough1995": "McDonough, W.F., Sun, S.-s. 1995. The composition of the Earth. Chemical Geology 120, 223-253.",
    "sun1989": "Sun, S.-s., McDonough, W.F. 1989. Chemical and isotopic systematics of oceanic basalts: implications "
    "for mantle composition and processes. Geological Society, London, Special Publications 42, 313-345.",
    "taylor1985": "Taylor, S.R., McLennan, S.M. 1985. The Continental Crust: its Composition and Evolution. "
    "Blackwell, Oxford.",
    "whalen1987": "Whalen, J.B., Currie, K.L., Chappell, B.W. 1987. A-type granites: geochemical characteristics, "
    "discrimination and petrogenesis. Contributions to Mineralogy and Petrology 95, 407-419.",
    "eby1992": "Eby, G.N. 1992. Chemical subdivision of the A-type granitoids: petrogenetic and tectonic "
    "implications. Geology 20, 641-644.",
    "loucks2014": "Loucks, R.R. 2014. Distinctive composition of copper-ore-forming arc magmas. "
    "Australian Journal of Earth Sciences 61, 5-16.",
    "richards2007": "Richards, J.P., Kerrich, R. 2007. Adakite-like rocks: their diverse origins and questionable "
    "role in metallogenesis. Economic Geology 102, 537-576.",
    "ballouard2016": "Ballouard, C., Poujol, M., Boulvais, P., Branquet, Y., Tartese, R., Vigneresse, J.-L. 2016. "
    "Nb-Ta fractionation in peraluminous granites: a marker of the magmatic-hydrothermal transition. "
    "Geology 44, 231-234.",
    "bau1996": "Bau, M. 1996. Controls on the fractionation of isovalent trace elements in magmatic and aqueous "
    "systems: evidence from Y/Ho, Zr/Hf, and lanthanide tetrad effect. "
    "Contributions to Mineralogy and Petrology 123, 323-333.",
    "lehmann1990": "Lehmann, B. 1990. Metallogeny of Tin. Springer, Berlin.",
    "steiner2019": "Steiner, B.M. 2019. Tools and workflows for grassroots Li-Cs-Ta (LCT) pegmatite exploration. "
    "Minerals 9, 499.",
    "maier1998": "Maier, W.D., Barnes, S.-J., de Waal, S.A. 1998. Exploration for magmatic Ni-Cu-PGE sulphide "
    "deposits: a review of recent advances in the use of geochemical tools. "
    "South African Journal of Geology 101, 237-253.",
    "park2019": "Park, J.-W., Campbell, I.H., Malaviarachchi, S.P.K., Cocker, H., Hao, H., Kay, S.M. 2019. Chalcophile "
    "element fertility and the formation of porphyry Cu +- Au deposits. Mineralium Deposita 54, 657-670.",
    "winchester1977": "Winchester, J.A., Floyd, P.A. 1977. Geochemical discrimination of different magma series and "
    "their differentiation products using immobile elements. Chemical Geology 20, 325-343.",
    "hallberg1984": "Hallberg, J.A. 1984. A geochemical aid to igneous rock type identification in deeply weathered "
    "terrain. Journal of Geochemical Exploration 20, 1-8.",
    "ross2009": "Ross, P.-S., Bedard, J.H. 2009. Magmatic affinity of modern and ancient subalkaline volcanic rocks "
    "determined from trace-element discriminant diagrams. Canadian Journal of Earth Sciences 46, 823-839.",
    "nesbitt1982": "Nesbitt, H.W., Young, G.M. 1982. Early Proterozoic climates and plate motions inferred from major "
    "element chemistry of lutites. Nature 299, 715-717.",
    "mclennan1993": "McLennan, S.M. 1993. Weathering and global denudation. Journal of Geology 101, 295-303.",
    "ishikawa1976": "Ishikawa, Y., Sawaguchi, T., Iwaya, S., Horiuchi, M. 1976. Delineation of prospecting targets for "
    "Kuroko deposits based on modes of volcanism of underlying dacite and alteration halos. "
    "Mining Geology 26, 105-117.",
    "large2001": "Large, R.R., Gemmell, J.B., Paulick, H., Huston, D.L. 2001. The alteration box plot: a simple "
    "approach to understanding the relationship between alteration mineralogy and lithogeochemistry associated with "
    "volcanic-hosted massive sulfide deposits. Economic Geology 96, 957-971.",
    "hughes1973": "Hughes, C.J. 1973. Spilites, keratophyres, and the igneous spectrum. "
    "Geological Magazine 109, 513-527.",
    "lebas1986": "Le Bas, M.J., Le Maitre, R.W., Streckeisen, A., Zanettin, B. 1986. A chemical classification of "
    "volcanic rocks based on the total alkali-silica diagram. Journal of Petrology 27, 745-750.",
    "lemaitre2002": "Le Maitre, R.W. (ed.) 2002. Igneous Rocks: a Classification and Glossary of Terms, 2nd edition. "
    "Cambridge University Press.",
    "middlemost1994": "Middlemost, E.A.K. 1994. Naming materials in the magma/igneous rock system. "
    "Earth-Science Reviews 37, 215-224.",
    "peccerillo1976": "Peccerillo, A., Taylor, S.R. 1976. Geochemistry of Eocene calc-alkaline volcanic rocks from "
    "the Kastamonu area, northern Turkey. Contributions to Mineralogy and Petrology 58, 63-81.",
    "rickwood1989": "Rickwood, P.C. 1989. Boundary lines within petrologic diagrams which use oxides of major and "
    "minor elements. Lithos 22, 247-263.",
    "irvine1971": "Irvine, T.N., Baragar, W.R.A. 1971. A guide to the chemical classification of the common "
    "volcanic rocks. Canadian Journal of Earth Sciences 8, 523-548.",
    "kuno1968": "Kuno, H. 1968. Differentiation of basalt magmas. In: Hess, H.H., Poldervaart, A. (eds) Basalts, "
    "volume 2. Interscience, New York, 623-688.",
    "macdonald1964": "Macdonald, G.A., Katsura, T. 1964. Chemical composition of Hawaiian lavas. "
    "Journal of Petrology 5, 82-133.",
    "pearce1984": "Pearce, J.A., Harris, N.B.W., Tindle, A.G. 1984. Trace element discrimination diagrams for the "
    "tectonic interpretation of granitic rocks. Journal of Petrology 25, 956-983.",
    "ishihara1977": "Ishihara, S. 1977. The magnetite-series and ilmenite-series granitic rocks. "
    "Mining Geology 27, 293-305.",
    "blevin2004": "Blevin, P.L. 2004. Redox and compositional parameters for interpreting the granitoid metallogeny of "
    "eastern Australia: implications for gold-rich ore systems. Resource Geology 54, 241-252.",
    "mgnumber": "Common practice, no source: the molar ratio of Mg to Mg + Fe2+, in per cent.",
}
