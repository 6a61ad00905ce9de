"""The usual cautions, in few words. They do not replace the site's rules; they point to them."""

SHORT = ("That a wetness can be read says that a number can be measured. It is never permission to open a valve: "
         "that belongs to the site's permit, the local code and the person authorised for the steam system.")

CAUTIONS = (
    "Live steam and its condensate scald at once, and the jet itself cannot be seen. Keep clear of the exhaust, "
    "glands and unions; wear face shield, gauntlets and long sleeves.",
    "Only a person authorised for this steam system opens valves, under the site's permit and risk assessment, with "
    "a second person present and the emergency isolation known.",
    "Fit or remove nothing unless the tapping is isolated, vented, drained, proved dead and locked off. A valve that "
    "passes means no work.",
    "Water hammer: drain first, open slowly and listen. If it bangs, shut and walk away.",
    "Lead the exhaust to a safe place, restrained, drained, never closed or valved: the body may not stand line "
    "pressure. Fence off the plume.",
    "A choked orifice is loud: measure, and wear hearing protection.",
    "Geothermal and biogas steam can carry toxic gas: personal monitor, upwind side, breathing-air rules.",
)
