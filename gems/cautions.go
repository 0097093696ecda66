package gems

// Cautions that several rows share, in the words in which sheets and tables print them.
// They say what the material itself brings; moving laps, eyes, dopping and polishing
// chemicals belong to every stone and are the sheet's affair.
const (
	wet = "Cut wet and wipe up wet: fine stone dust harms the lungs."

	silica = "Its dust is silica: breathing the crystalline kind causes silicosis, also among gem " +
		"cutters. Never cut it dry. The US limit is 50 µg/m³ of respirable dust over 8 hours, " +
		"action level 25; local rules come first."

	glassDust = "Cut wet and wipe up wet: glass dust irritates eyes and lungs, and chips are sharp."

	splinters = "Splinters are razor sharp: protect eyes and fingers."

	metalDust = "Its dust holds heavy metals: cut wet, keep the slurry off food and skin, do not " +
		"pour it down the drain."

	lead = "Holds lead, poisonous when breathed or swallowed: cut wet, wear gloves, wash before eating, " +
		"collect the slurry as hazardous waste."

	beryllium = "Holds beryllium: breathing its dust can sensitise and harm the lungs for good. Cut " +
		"wet only, never sand dry."

	beryllia = "Beryllium oxide is very poisonous as dust. Leave it to licensed workshops."

	cleaves = "Cleaves: keep facets some degrees off the cleavage, use light pressure and fine grit, " +
		"let nothing knock it."

	stress = "Heat shock can crack it or change its colour: warm and cool it slowly on the dop, or dop it cold."

	fissures = "Rough with feathers or strain may come apart on the lap: look for it between crossed " +
		"polarisers first."

	chips = "Edges chip: wrap or separate finished stones."

	dries = "Do not let it dry out or boil in dopping wax: it may craze."

	acid = "Acids attack it, also weak ones: no pickling, no acid cleaning."

	fluoride = "Gives off poisonous hydrogen fluoride with strong acids or great heat."

	oiled = "Emerald is often filled with oil or resin: solvents, ultrasonic baths and heat draw it out."

	irradiated = "Colour may come from irradiation: stones fresh from a reactor can be radioactive; " +
		"buy lots released under local law."

	radioactive = "May hold uranium and thorium: measure green and brown rough, cut it wet and keep " +
		"the dust away."

	fibrous = "Splinters along its length: protect eyes and fingers from needles."

	tigersEye = "Tiger's-eye and some included rough may hold asbestos fibres (crocidolite): do not " +
		"cut it without proper extraction."

	horsetail = "The horsetails in demantoid are asbestos fibres (chrysotile): cut wet and wipe up wet."

	diamondWork = "Diamond is worked with other machines and with training: for it this is a model " +
		"of light, not instructions for cutting."

	burns = "Softens and burns: no hot dopping, light pressure, keep flames away; its fumes irritate."

	flammable = "Catches fire: no flame or hot wax near it, good ventilation."

	skinOil = "Keep it off hot plates and wash it off skin."

	toxicLiquid = "Poisonous, and so is its vapour: use it under extraction with gloves, or choose " +
		"another liquid."

	diiodomethane = "Irritates skin and eyes and harms the nerves; decomposes and darkens in light. " +
		"Use extraction and gloves."

	filmCare = "Coatings are put on in vacuum by licensed shops; acids used to strip them are dangerous."

	cement = "Uncured cement irritates the skin and sensitises it: gloves, and cure it fully."
)
