package model

import (
	"strings"

	"pavilight/app/words"
	"pavilight/gems"
)

// MaterialName returns what a material is called.
func MaterialName(w *words.Words, m *gems.Material) string { return w.Among(materialNames(), m.Name) }

// shortName names a material by its key, which is shorter than its name.
func shortName(w *words.Words, m *gems.Material) string {
	if m.Key == "" {
		return m.Name
	}
	name := strings.ReplaceAll(m.Key, "-", " ")
	return w.Among(materialNames(), strings.ToUpper(name[:1])+name[1:])
}

// NameOf names a surrounding in short, as it stands within a sentence.
func (l *Look) NameOf(m *gems.Material) string { return l.words.Within(shortName(l.words, m)) }

// materialNames are the names of materials, and in short of surroundings, that the
// languages have words of their own for. A material of the user's stands as it is called.
func materialNames() []words.Key {
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
