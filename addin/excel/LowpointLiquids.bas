Option Explicit

Public Function LPU_ATMOSPHERE(Optional elevation)
    LPU_ATMOSPHERE = LpCell("LPU_ATMOSPHERE", elevation)
End Function

Public Function LPU_COLUMN(Optional p, Optional rise, Optional density)
    LPU_COLUMN = LpCell("LPU_COLUMN", p, rise, density)
End Function

Public Function LPU_CRITICAL_PRESSURE(Optional fluid)
    LPU_CRITICAL_PRESSURE = LpCell("LPU_CRITICAL_PRESSURE", fluid)
End Function

Public Function LPU_DENSITY(Optional fluid, Optional t, Optional p, Optional salinity)
    LPU_DENSITY = LpCell("LPU_DENSITY", fluid, t, p, salinity)
End Function

Public Function LPU_SATURATION_TEMPERATURE(Optional fluid, Optional p)
    LPU_SATURATION_TEMPERATURE = LpCell("LPU_SATURATION_TEMPERATURE", fluid, p)
End Function

Public Function LPU_SOUND_SPEED(Optional fluid, Optional t, Optional p)
    LPU_SOUND_SPEED = LpCell("LPU_SOUND_SPEED", fluid, t, p)
End Function

Public Function LPU_UNIT(Optional value, Optional from_, Optional to_, Optional atmosphere)
    LPU_UNIT = LpCell("LPU_UNIT", value, from_, to_, atmosphere)
End Function

Public Function LPU_VAPOUR_PRESSURE(Optional fluid, Optional t, Optional salinity)
    LPU_VAPOUR_PRESSURE = LpCell("LPU_VAPOUR_PRESSURE", fluid, t, salinity)
End Function

Public Function LPU_VISCOSITY(Optional fluid, Optional t, Optional p, Optional salinity)
    LPU_VISCOSITY = LpCell("LPU_VISCOSITY", fluid, t, p, salinity)
End Function

Public Function LP_ATMOSPHERE(Optional elevation)
    LP_ATMOSPHERE = LpCell("LP_ATMOSPHERE", elevation)
End Function

Public Function LP_COLUMN(Optional p, Optional rise, Optional density)
    LP_COLUMN = LpCell("LP_COLUMN", p, rise, density)
End Function

Public Function LP_CRITICAL_PRESSURE(Optional fluid)
    LP_CRITICAL_PRESSURE = LpCell("LP_CRITICAL_PRESSURE", fluid)
End Function

Public Function LP_DENSITY(Optional fluid, Optional t, Optional p, Optional salinity)
    LP_DENSITY = LpCell("LP_DENSITY", fluid, t, p, salinity)
End Function

Public Function LP_SATURATION_TEMPERATURE(Optional fluid, Optional p)
    LP_SATURATION_TEMPERATURE = LpCell("LP_SATURATION_TEMPERATURE", fluid, p)
End Function

Public Function LP_SOUND_SPEED(Optional fluid, Optional t, Optional p)
    LP_SOUND_SPEED = LpCell("LP_SOUND_SPEED", fluid, t, p)
End Function

Public Function LP_UNIT(Optional value, Optional from_, Optional to_, Optional atmosphere)
    LP_UNIT = LpCell("LP_UNIT", value, from_, to_, atmosphere)
End Function

Public Function LP_VAPOUR_PRESSURE(Optional fluid, Optional t, Optional salinity)
    LP_VAPOUR_PRESSURE = LpCell("LP_VAPOUR_PRESSURE", fluid, t, salinity)
End Function

Public Function LP_VISCOSITY(Optional fluid, Optional t, Optional p, Optional salinity)
    LP_VISCOSITY = LpCell("LP_VISCOSITY", fluid, t, p, salinity)
End Function
