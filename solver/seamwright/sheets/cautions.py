"""What can hurt: said on every set of sheets. No instructions for safe work, only where to get them."""

CAUTIONS = (
    "Blades, shears and rotary cutters cut hands as well as goods: guard the edge, cut away from you, keep children off.",
    "Hot knives, irons and heat guns burn, and heated synthetics, foams, vinyl and neoprene give off harmful fumes: work in "
    "moving air and only as the makers of the tool and of the goods allow.",
    "Solvent and contact adhesives catch fire and harm when breathed in: follow the maker's safety data sheet.",
    "Dust of foam, felt and leather harms the lungs and can burn: extract it at the tool, wear the mask its sheet asks for.",
    "Cut edges of sheet metal and card are sharp.",
    "Goods for stages, seats, tents and public rooms must meet the fire rules of the place they are used in: ask the local "
    "authority, and leave what needs a licence, like rigging, lifting, rescue and pressure, to those who hold one.",
    "The figures for the goods are starting values: sew a swatch first. The instructions of the maker of the goods, local "
    "codes and licensed practice come before these sheets.",
)
