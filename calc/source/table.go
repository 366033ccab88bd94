package source

// table is the bibliography, grouped by subject. It is never written to.
var table = [...]Source{
	// Gate drive, floating supply and charge budget.
	{
		Key: "an6076", Title: "Design and Application Guide of Bootstrap Circuit for High-Voltage Gate-Drive IC",
		Publisher: "Fairchild Semiconductor", Document: "AN-6076", Year: "2008", Provenance: Memory,
	},
	{
		Key: "ir2114", Title: "IR2114/IR2214 half-bridge gate driver data sheet, bootstrap capacitor and resistor",
		Publisher: "International Rectifier", Document: "PD60213, 2.1 and 2.2; also Design Tip DT04-4", Provenance: Read,
		Note: "the equation and the results were read; the last inputs of the example are from memory",
	},
	{
		Key: "dt98-2a", Title: "Bootstrap Component Selection for Control ICs",
		Publisher: "International Rectifier", Document: "Design Tip DT98-2a", Year: "1998", Provenance: Derived,
		Note: "the equation is published without a result for these inputs",
	},
	{
		Key: "l6386e", Title: "L6386E high-side and low-side driver data sheet, bootstrap driver",
		Publisher: "STMicroelectronics", Document: "Doc 13989 Rev 2, 4.1", Provenance: Read,
	},
	{
		Key: "l6388e", Title: "L6388E high-side and low-side driver data sheet, bootstrap driver",
		Publisher: "STMicroelectronics", Document: "Doc 13991 Rev 5, eq. 2 and 3", Provenance: Read,
	},
	{
		Key: "l6392", Title: "L6392 high-side and low-side driver data sheet, bootstrap driver",
		Publisher: "STMicroelectronics", Document: "Doc 14494 Rev 5, eq. 3 and 4", Provenance: Read,
	},
	{
		Key: "a3946", Title: "A3946 half-bridge power MOSFET controller data sheet",
		Publisher: "Allegro MicroSystems", Document: "29319.150", Provenance: Read,
	},
	{
		Key: "hip4086", Title: "HIP4086 three-phase MOSFET driver data sheet, boot capacitor",
		Publisher: "Intersil", Provenance: Read,
		Note: "the equation was read; the numbers of the example are from memory",
	},
	{
		Key: "microchip-buck", Title: "Synchronous buck controller data sheet, boot capacitor",
		Publisher: "Microchip Technology", Document: "4.5", Provenance: Read,
	},
	{
		Key: "slus486b", Title: "UCC27221/UCC27222 synchronous buck driver data sheet",
		Publisher: "Texas Instruments", Document: "SLUS486B, eq. 1", Provenance: Read,
	},
	{
		Key: "sluscj9", Title: "UCC21520 isolated dual-channel gate driver data sheet, bootstrap diode and peak currents",
		Publisher: "Texas Instruments", Document: "SLUSCJ9", Provenance: Memory,
	},
	{
		Key: "slua887a", Title: "Bootstrap Circuitry Selection for Half-Bridge Configurations",
		Publisher: "Texas Instruments", Document: "SLUA887A, eq. 7", Provenance: Read,
		Note: "the equation was read; the numbers of the check are derived",
	},
	{
		Key: "slusce9b", Title: "Gate driver data sheet, release delay of the floating undervoltage lockout",
		Publisher: "Texas Instruments", Document: "SLUSCE9B", Provenance: Read,
	},
	{
		Key: "im393", Title: "IM393 intelligent power module application note, initial charging of the bootstrap capacitor",
		Publisher: "Infineon Technologies", Document: "V1.0, 6.2, eq. 12", Provenance: Read,
		Note: "the equation was read; the numbers of the example are from memory",
	},
	{
		Key: "lmg1210", Title: "LMG1210 half-bridge MOSFET and GaN FET driver data sheet",
		Publisher: "Texas Instruments", Document: "eq. 1 to 3", Provenance: Read,
	},
	{
		Key: "snvaa94", Title: "Application note on overcharge of the floating supply in GaN half bridges",
		Publisher: "Texas Instruments", Document: "SNVAA94", Year: "2023", Provenance: Read,
	},
	{
		Key: "snosdg7a", Title: "TPS7H6101 GaN half-bridge data sheet, negative switch-node transients",
		Publisher: "Texas Instruments", Document: "SNOSDG7A", Provenance: Read,
		Note: "the result with a diode drop is derived",
	},
	{
		Key: "ucc27523", Title: "UCC27523 family dual gate driver data sheet, drive current and power dissipation",
		Publisher: "Texas Instruments", Document: "SLUSAQ3", Provenance: Read,
	},
	{
		Key: "slusaq3f", Title: "UCC27523 family dual gate driver data sheet, revision F, power dissipation",
		Publisher: "Texas Instruments", Document: "SLUSAQ3F", Year: "2013", Provenance: Read,
		Note: "revision E (2012) lacks the factor 0.5 in the same equation",
	},
	{
		Key: "slup169", Title: "Design and Application Guide for High Speed MOSFET Gate Drive Circuits",
		Publisher: "Texas Instruments", Document: "SLUP169", Provenance: Memory,
	},
	{
		Key: "2ed2109", Title: "2ED2109S06F half-bridge gate driver data sheet, thermal derating",
		Publisher: "Infineon Technologies", Provenance: Read,
	},
	{
		Key: "lm5104", Title: "LM5104 half-bridge gate driver data sheet, power dissipation",
		Publisher: "National Semiconductor", Document: "eq. 12", Provenance: Read,
		Note: "the equation was read; the numbers of the check are derived",
	},

	// Layout.
	{
		Key: "recom", Title: "Technical note on the inductance of tracks and vias",
		Publisher: "RECOM Power", Provenance: Read,
	},
	{
		Key: "johnson-graham", Title: "High-Speed Digital Design, via inductance",
		Publisher: "Prentice Hall; H. Johnson, M. Graham", Year: "1993", Provenance: Read,
	},

	// Capacitors.
	{
		Key: "eia-198", Title: "Ceramic Dielectric Capacitors, Classes I, II, III and IV",
		Publisher: "Electronic Industries Alliance", Document: "EIA-198", Provenance: Read,
		Note: "the class code was read as reproduced by slaa701b and holy-stone; the standard itself was not",
	},
	{
		Key: "iec-60384-22", Title: "Fixed capacitors for use in electronic equipment, Part 22: Fixed surface mount multilayer capacitors of ceramic dielectric, Class 2",
		Publisher: "IEC", Document: "IEC 60384-22", Provenance: Memory,
	},
	{
		Key: "slaa701b", Title: "LC Filter Design, class code of ceramic capacitors",
		Publisher: "Texas Instruments", Document: "SLAA701B, table 1-16", Provenance: Read,
	},
	{
		Key: "holy-stone", Title: "Class code and ageing of ceramic capacitors",
		Publisher: "Holy Stone", Provenance: Read,
	},
	{
		Key: "kemet-c1002", Title: "X7R ceramic chip capacitor data sheet, insulation resistance",
		Publisher: "KEMET", Document: "C1002", Provenance: Read,
		Note: "the limit was read; the currents of the checks are derived",
	},
	{
		Key: "aluminium-makers", Title: "Leakage current of aluminium electrolytic capacitors, data sheets of several makers",
		Publisher: "several makers", Provenance: Read,
		Note: "the limit was read; the currents of the checks are derived",
	},
	{
		Key: "mil-prf-55365", Title: "Capacitor, Fixed, Electrolytic (Tantalum), Chip, stability at low and high temperature",
		Publisher: "United States Department of Defense", Document: "MIL-PRF-55365", Provenance: Memory,
	},

	// Markings and preferred values.
	{
		Key: "iec-60062", Title: "Marking codes for resistors and capacitors",
		Publisher: "IEC", Document: "IEC 60062", Provenance: Memory,
	},
	{
		Key: "iec-60063", Title: "Preferred number series for resistors and capacitors",
		Publisher: "IEC", Document: "IEC 60063", Provenance: Memory,
	},

	// Derating.
	{
		Key: "nasa-eee-inst-002", Title: "Instructions for EEE Parts Selection, Screening, Qualification, and Derating",
		Publisher: "NASA", Document: "EEE-INST-002", Year: "2003", Provenance: Memory,
	},
	{
		Key: "ecss-q-st-30-11", Title: "Space product assurance: Derating, EEE components",
		Publisher: "European Cooperation for Space Standardization", Document: "ECSS-Q-ST-30-11C", Provenance: Memory,
	},
	{
		Key: "src-derating", Title: "Part derating parameters",
		Publisher: "System Reliability Center", Provenance: Read,
	},

	// Diode physics and constants.
	{
		Key: "lauritzen-ma-1991", Title: "A Simple Diode Model with Reverse Recovery",
		Publisher: "IEEE Transactions on Power Electronics; P. O. Lauritzen, C. L. Ma", Document: "6(2), 188-191", Year: "1991", Provenance: Memory,
	},
	{
		Key: "iec-60747-2", Title: "Semiconductor devices, Part 2: Discrete devices, rectifier diodes",
		Publisher: "IEC", Document: "IEC 60747-2", Provenance: Memory,
	},
	{
		Key: "codata", Title: "CODATA recommended values of the fundamental physical constants",
		Publisher: "CODATA Task Group on Fundamental Constants", Year: "2018", Provenance: Memory,
	},
	{
		Key: "si", Title: "The International System of Units, exact values of k and e",
		Publisher: "BIPM", Document: "SI Brochure, 9th edition", Year: "2019", Provenance: Memory,
	},
	{
		Key: "textbook", Title: "Standard texts on circuits and semiconductor devices: diode equation, charge of a capacitor, linear networks",
		Publisher: "general literature", Provenance: CommonPractice,
	},
	{
		Key: "common-practice", Title: "Common practice of power-electronics design",
		Publisher: "general practice", Provenance: CommonPractice,
	},
}
