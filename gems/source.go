package gems

import "strings"

// Source says where a number comes from and how it came here. Its text ends with one
// of the marks below.
type Source string

// Mark is how a number came here.
type Mark string

// The marks.
const (
	Read     Mark = "read"                       // in a copy of the named source
	Memory   Mark = "from memory, not checked"   // of the named source, which was not at hand
	Computed Mark = "computed"                   // from inputs that the source names
	Practice Mark = "common practice, no source" // a fact of the trade
	Given    Mark = "given by the user"          // in a plan, a flag or a file of their own
)

// Mark returns the mark at the end of the source's text, or "" where it has none.
func (s Source) Mark() Mark {
	for _, m := range []Mark{Read, Memory, Computed, Practice, Given} {
		if string(s) == string(m) || strings.HasSuffix(string(s), "; "+string(m)) {
			return m
		}
	}
	return ""
}

// given is the source of numbers that a user wrote without naming their own.
const given = Source(Given)

// Where published dispersion formulas were read.
const (
	readInOpenData = " (as stored in the open data set refractiveindex.info, CC0); read"

	peter1923 Source = "F. Peter, Z. Phys. 15, 358 (1923)" + readInOpenData
	bond1965  Source = "W. L. Bond, J. Appl. Phys. 36, 1674 (1965), fit of the Handbook of Optics" +
		readInOpenData
	bondDodge Source = "M. J. Dodge, Handbook of Laser Science and Technology IV (1986), on data of Bond (1965)" +
		readInOpenData
	devore1951   Source = "J. R. DeVore, J. Opt. Soc. Am. 41, 416 (1951)" + readInOpenData
	debenham1984 Source = "M. Debenham, Appl. Opt. 23, 2238 (1984), fit of C. A. Klein, Appl. Opt. 25, 1873 (1986)" +
		readInOpenData
	dodge1984    Source = "M. J. Dodge, Appl. Opt. 23, 1980 (1984)" + readInOpenData
	ghosh1999    Source = "G. Ghosh, Opt. Commun. 163, 95 (1999)" + readInOpenData
	malitson1963 Source = "I. H. Malitson, Appl. Opt. 2, 1103 (1963)" + readInOpenData
	malitson1965 Source = "I. H. Malitson, J. Opt. Soc. Am. 55, 1205 (1965); C. Z. Tan (1998)" +
		readInOpenData
	walling1980 Source = "J. Walling et al., IEEE J. Quantum Electron. 16, 1302 (1980), fit of P. Loiko and A. Major (2016)" +
		readInOpenData
	wang2013   Source = "S. Wang et al., Laser Photonics Rev. 7, 831 (2013)" + readInOpenData
	zelmon1997 Source = "D. E. Zelmon, D. L. Small and D. Jundt, J. Opt. Soc. Am. B 14, 3319 (1997)" +
		readInOpenData
	zelmon1998yag Source = "D. E. Zelmon, D. L. Small and R. Page, Appl. Opt. 37, 4933 (1998)" +
		readInOpenData
	hrabovsky2021 Source = "J. Hrabovský et al., Opt. Mater. Express 11, 1218 (2021)" + readInOpenData
	gupta2022     Source = "Gupta et al., Adv. Photonics Res. 2022, 2200152" + readInOpenData
	rheims1997    Source = "J. Rheims, J. Köser and T. Wriedt, Meas. Sci. Technol. 8, 601 (1997)" +
		readInOpenData
	beadie2015    Source = "G. Beadie et al., Appl. Opt. 54, F139 (2015)" + readInOpenData
	sultanova2009 Source = "N. Sultanova, S. Kasarova and I. Nikolov, Acta Phys. Pol. A 116, 585 (2009)" +
		readInOpenData
	ciddor1996 Source = "P. E. Ciddor, Appl. Opt. 35, 1566 (1996)" + readInOpenData
	schottB270 Source = "Schott, B 270 data sheet, August 1993" + readInOpenData
	schott2017 Source = "Schott, optical glass catalogue, January 2017" + readInOpenData
	norland    Source = "Norland, data sheet of optical adhesive 61 (2016)" + readInOpenData

	malitsonDodge1972 Source = "I. H. Malitson and M. J. Dodge, J. Opt. Soc. Am. 62, 1405 (1972)" +
		readInOpenData
	malitsonHandbook Source = "I. H. Malitson, in the Handbook of Optics, 3rd ed., vol. 4 (2009)" +
		readInOpenData
	tropfThomas1991 Source = "W. J. Tropf and M. E. Thomas, in Palik, Handbook of Optical Constants of Solids II (1991), " +
		"fit of the Handbook of Optics (2009)" + readInOpenData
	edwardsWhite1991 Source = "D. F. Edwards and R. H. White, in Palik, Handbook of Optical Constants of Solids II (1991)" +
		readInOpenData
	stephensMalitson1952 Source = "R. E. Stephens and I. H. Malitson, J. Res. NBS 49, 249 (1952)" +
		readInOpenData
	woodNassau1982 Source = "D. L. Wood and K. Nassau, Appl. Opt. 21, 2978 (1982)" + readInOpenData
	woodNassau1990 Source = "D. L. Wood and K. Nassau, Appl. Opt. 29, 3704 (1990); from " +
		"memory, not checked"
	moutzouris2013 Source = "K. Moutzouris et al., Appl. Phys. B 116, 617 (2013)" + readInOpenData
	weber2003      Source = "M. J. Weber, Handbook of Optical Materials (CRC 2003), section " +
		"1.3.4, p. 78; read"
	iapws1997 Source = "IAPWS R9-97, Refractive Index of Ordinary Water Substance, as " +
		"coded in the open package iapws; read"
)

// Where single values were found.
const (
	gemTable Source = "gem tables collected in the open data set mineral-database (gemmology-dev, " +
		"MIT), a secondary source; read"
	schumann Source = "W. Schumann, Gemstones of the World, 4th ed. (2009), table of dispersion, as " +
		"quoted; read"

	herbertSmith Source = "G. F. Herbert Smith, Gem-Stones and their Distinctive Characters, 3rd ed. " +
		"(1919), tables III to VIII; read"
	itc     Source = "International Tables for Crystallography C (2006), table 3.3.2.1; read"
	rika    Source = "Chronological Scientific Tables (NAOJ 2000), Phys/Chem 98, as quoted; read"
	gemPage Source = "a gemmology course page on immersion liquids; read"

	handbooks      Source = "the usual gem and chemical handbooks; from memory, not checked"
	betaFromMemory Source = "middle index from the usual gem handbooks; from memory, not checked"
	betaFromAngle  Source = "middle index from the optic angle 2V, 54 to 68 degrees, in the table of minerals of the " +
		"University of the Western Cape; computed"
	schottMemory   Source = "Schott data sheet; from memory, not checked"
	abbeFromMemory Source = "Abbe number from the tables of Landolt and Börnstein; from memory, not checked"

	iso8036 Source = "ISO 8036-1:1998, clause 2.1 (n_e 1.5180, V_e 44), two Cauchy terms through both; computed"

	likeSilica      Source = "dispersion taken as that of silica glass (Malitson 1965); computed"
	likeZircon      Source = "dispersion taken as that of high zircon; from memory, not checked"
	likeCyclohexane Source = "Abbe number taken as that of cyclohexane, a saturated hydrocarbon " +
		"(Rheims et al. 1997); computed"
	likeImmersion     Source = "Abbe number taken as that of immersion oil (ISO 8036-1:1998); computed"
	likeDiiodomethane Source = "Abbe number taken as that of pure diiodomethane; from memory, not checked"
)

// Where cautions come from.
const (
	practice     Source = "common practice, no source"
	silicaSource Source = "OSHA respirable crystalline silica rule as described by CPWR; " +
		"White, Chetty and Bateman, Am. J. Ind. Med. 19(2) (1991), abstract; read"
	immersionSafety Source = "International Tables for Crystallography C (2006), 3.3.2; CCOHS Cheminfo 634; " +
		"a gemmology course page; read"
)
