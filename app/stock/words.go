package stock

import (
	"slices"
	"strings"

	"pavilight/app/words"
	"pavilight/gems"
)

// NameOf returns what a material is called in a language. A material of the user's stands
// as it is called.
func NameOf(w *words.Words, m *gems.Material) string { return w.Among(names(), m.Name) }

// ShortOf names a material by its key, which is shorter than its name.
func ShortOf(w *words.Words, m *gems.Material) string {
	if m.Key == "" {
		return m.Name
	}
	return w.Among(names(), titled(m.Key))
}

// titled writes a key as a name.
func titled(key string) string {
	name := strings.ReplaceAll(key, "-", " ")
	return strings.ToUpper(name[:1]) + name[1:]
}

// KeyOf returns what a key of the table stands for, as it stands within a sentence: in
// English the key itself, as the command line has it. A key of the user's stays what it is.
func KeyOf(w *words.Words, key string) string {
	if key == "" || w.Language() == "en" {
		return key
	}
	called := []string{titled(key)}
	if m, err := gems.Find(key); err == nil && m.Key == key {
		called = append(called, m.Name)
	}
	for _, name := range called {
		if k := words.Key(name); slices.Contains(names(), k) {
			return w.Within(w.Say(k))
		}
	}
	return key
}

// CautionsOf returns what to mind with a material, each with a full stop.
func CautionsOf(w *words.Words, m *gems.Material) []string {
	var said []string
	for _, text := range m.Cautions {
		said = append(said, w.Among(cautions(), text))
	}
	return said
}

// ToughnessOf returns how a material bears knocks and heat, empty where that is not known.
func ToughnessOf(w *words.Words, m *gems.Material) string { return w.Among(toughness(), m.Toughness) }

// CleavageOf returns along which planes a material splits, empty where that is not known.
func CleavageOf(w *words.Words, m *gems.Material) string { return w.Among(cleavage(), m.Cleavage) }

// names are the names of materials, and in short of surroundings, that the languages have
// words of their own for.
func names() []words.Key {
	return []words.Key{
		"Air", "Water", "Oil", "Medicinal white oil", "Immersion oil", "Microscope immersion oil, nominal", "Glycerol",
		"Kerosene", "Cedar oil", "Vegetable oil", "Ethanol", "Toluene", "Carbon tetrachloride", "Bromoform",
		"Chloronaphthalene", "α-Chloronaphthalene", "Bromonaphthalene", "α-Bromonaphthalene", "Diiodomethane",
		"Diiodomethane sulfur", "Diiodomethane saturated with sulfur", "Magnesium fluoride film", "Optical cement",
		"Diamond", "Fluorite", "Apatite", "Calcite", "Rhodochrosite", "Barite", "Celestine", "Brazilianite",
		"Scheelite", "Sphalerite", "Wulfenite", "Cerussite", "Corundum", "Chrysoberyl", "Spinel", "Taaffeite", "Cassiterite",
		"Rutile", "Periclase", "Bromellite", "Zincite", "Quartz", "Opal", "Orthoclase", "Oligoclase", "Labradorite",
		"Scapolite", "Pollucite", "Beryl", "Topaz", "Tourmaline", "Danburite", "Andalusite", "Iolite", "Phenakite", "Euclase",
		"Peridot", "Spodumene", "Diopside", "Enstatite", "Tanzanite", "Sinhalite", "Kornerupine", "Kyanite", "Epidote",
		"Vesuvianite", "Staurolite", "Benitoite", "Zircon", "Zircon, low", "Sphene", "Pyrope", "Rhodolite", "Almandine",
		"Spessartine", "Grossular", "Andradite", "Uvarovite", "Cubic zirconia", "Moissanite (6H silicon carbide)",
		"Spinel, flame fusion", "Yttrium aluminium garnet", "Lutetium aluminium garnet", "Gadolinium gallium garnet",
		"Strontium titanate", "Lithium niobate", "Crown glass N-BK7", "Crown glass B 270", "Flint glass F2",
		"Dense flint glass SF6", "Silica glass", "Obsidian", "Moldavite", "Amber", "Acrylic (PMMA)", "Polystyrene",
	}
}

// cautions are those of the table's stones.
func cautions() []words.Key {
	return []words.Key{
		"Acids attack it, also weak ones: no pickling, no acid cleaning.",
		"Beryllium oxide is very poisonous as dust. Leave it to licensed workshops.",
		"Cleaves: keep facets some degrees off the cleavage, use light pressure and fine grit, let nothing knock it.",
		"Colour may come from irradiation: stones fresh from a reactor can be radioactive; " +
			"buy lots released under local law.",
		"Cut wet and wipe up wet: fine stone dust harms the lungs.",
		"Cut wet and wipe up wet: glass dust irritates eyes and lungs, and chips are sharp.",
		"Diamond is worked with other machines and with training: for it this is a model of light, " +
			"not instructions for cutting.",
		"Do not let it dry out or boil in dopping wax: it may craze.",
		"Edges chip: wrap or separate finished stones.",
		"Emerald is often filled with oil or resin: solvents, ultrasonic baths and heat draw it out.",
		"Gives off poisonous hydrogen fluoride with strong acids or great heat.",
		"Heat shock can crack it or change its colour: warm and cool it slowly on the dop, or dop it cold.",
		"Holds beryllium: breathing its dust can sensitise and harm the lungs for good. Cut wet only, never sand dry.",
		"Holds lead, poisonous when breathed or swallowed: cut wet, wear gloves, wash before eating, " +
			"collect the slurry as hazardous waste.",
		"Its dust holds heavy metals: cut wet, keep the slurry off food and skin, do not pour it down the drain.",
		"Its dust is silica: breathing the crystalline kind causes silicosis, also among gem cutters. Never cut it dry. " +
			"The US limit is 50 µg/m³ of respirable dust over 8 hours, action level 25; local rules come first.",
		"May hold uranium and thorium: measure green and brown rough, cut it wet and keep the dust away.",
		"Rough with feathers or strain may come apart on the lap: look for it between crossed polarisers first.",
		"Softens and burns: no hot dopping, light pressure, keep flames away; its fumes irritate.",
		"Splinters along its length: protect eyes and fingers from needles.",
		"Splinters are razor sharp: protect eyes and fingers.",
		"The horsetails in demantoid are asbestos fibres (chrysotile): cut wet and wipe up wet.",
		"Tiger's-eye and some included rough may hold asbestos fibres (crocidolite): " +
			"do not cut it without proper extraction.",
	}
}

// toughness is what the table says of how stones bear work.
func toughness() []words.Key {
	return []words.Key{
		"bears heat well", "brittle", "brittle: heated stones chip at their edges",
		"brittle; cracks when it dries out or is heated", "brittle; cracks with heat", "brittle; cracks with sudden heat",
		"brittle; its polish dulls in damp air", "brittle; its splinters are razor sharp", "brittle; scratches easily",
		"brittle; sudden heat cracks it", "cleaves", "cleaves and cracks with heat", "cleaves at a knock; bears heat badly",
		"cleaves at a touch", "cleaves at a touch; heat cracks it", "cleaves easily", "cleaves very easily",
		"cleaves; sudden heat and ultrasonic baths crack it", "excellent|how it bears work", "excellent; bears knocks and pressure well",
		"fair|how it bears work", "fair; may brown in sunlight", "fair; stress in zoned crystals can split them on the lap",
		"fair; sudden heat cracks it, acid attacks it", "good|how it bears work", "good; brittle at thin edges",
		"good; emerald with fissures is brittle", "good; heat from dopping can crack it or change its colour",
		"good; strained boules can split", "hardest of all, yet it cleaves at a sharp knock",
		"shatters with the least heat or knock", "soft; melts under the lap", "splinters along its cleavage",
		"splits along its length; 4 to 5 along it, 6 to 7 across", "tough but soft; melts under the lap",
		"tough but soft; softens and burns with heat", "tough; a twinned crystal parts", "very brittle",
	}
}

// cleavage is what the table says of how stones split.
func cleavage() []words.Key {
	return []words.Key{
		"distinct {010}", "distinct {100} and {110}", "distinct {101}", "distinct {101}, poor {112}",
		"distinct {110} and {021}", "distinct {110}", "distinct {110}, two directions at about 90 degrees",
		"good {010}", "good {100}", "good {110}, poor {010}", "good {110}, two directions at about 87 degrees",
		"good {210}, two directions at about 88 degrees", "imperfect", "imperfect along the prism",
		"imperfect basal, rarely seen", "imperfect, rarely seen", "indistinct", "none|cleavage", "none; parts on twin planes",
		"perfect basal {001}", "perfect dodecahedral {110}, six directions", "perfect in one direction",
		"perfect in two directions at about 90 degrees", "perfect octahedral {111}", "perfect rhombohedral",
		"perfect rhombohedral {10-11}", "perfect {001}, good {210}", "perfect {001}, hard to start",
		"perfect {001}, imperfect {100}", "perfect {010}", "perfect {100}", "perfect {100}, good {010}",
		"perfect {110}, two directions at about 87 degrees", "poor|cleavage", "poor basal", "poor {0001}", "poor {010}",
		"poor {100}", "poor {110}",
	}
}
