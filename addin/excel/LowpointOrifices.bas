Option Explicit

Public Function LPU_ORIFICE_BORE(Optional flow, Optional p1, Optional p2, Optional pipe, Optional density, Optional pv, Optional pc, Optional viscosity, Optional bore_length, Optional holes)
    LPU_ORIFICE_BORE = LpCell("LPU_ORIFICE_BORE", flow, p1, p2, pipe, density, pv, pc, viscosity, bore_length, holes)
End Function

Public Function LPU_ORIFICE_DROP(Optional flow, Optional bore, Optional pipe, Optional density, Optional viscosity, Optional bore_length, Optional holes, Optional taps)
    LPU_ORIFICE_DROP = LpCell("LPU_ORIFICE_DROP", flow, bore, pipe, density, viscosity, bore_length, holes, taps)
End Function

Public Function LPU_ORIFICE_FL(Optional bore, Optional pipe, Optional bore_length, Optional holes)
    LPU_ORIFICE_FL = LpCell("LPU_ORIFICE_FL", bore, pipe, bore_length, holes)
End Function

Public Function LPU_ORIFICE_FLOW(Optional p1, Optional p2, Optional bore, Optional pipe, Optional density, Optional pv, Optional pc, Optional viscosity, Optional bore_length, Optional holes)
    LPU_ORIFICE_FLOW = LpCell("LPU_ORIFICE_FLOW", p1, p2, bore, pipe, density, pv, pc, viscosity, bore_length, holes)
End Function

Public Function LPU_ORIFICE_LIMIT(Optional limit, Optional bore, Optional pipe, Optional bore_length, Optional holes, Optional p1, Optional pv, Optional pc, Optional form)
    LPU_ORIFICE_LIMIT = LpCell("LPU_ORIFICE_LIMIT", limit, bore, pipe, bore_length, holes, p1, pv, pc, form)
End Function

Public Function LPU_ORIFICE_LOSS(Optional bore, Optional pipe, Optional bore_length, Optional holes, Optional reynolds)
    LPU_ORIFICE_LOSS = LpCell("LPU_ORIFICE_LOSS", bore, pipe, bore_length, holes, reynolds)
End Function

Public Function LPU_PLATE_THICKNESS(Optional drop, Optional support_diameter, Optional bore, Optional stress, Optional support, Optional allowance)
    LPU_PLATE_THICKNESS = LpCell("LPU_PLATE_THICKNESS", drop, support_diameter, bore, stress, support, allowance)
End Function

Public Function LP_ORIFICE_BORE(Optional flow, Optional p1, Optional p2, Optional pipe, Optional density, Optional pv, Optional pc, Optional viscosity, Optional bore_length, Optional holes)
    LP_ORIFICE_BORE = LpCell("LP_ORIFICE_BORE", flow, p1, p2, pipe, density, pv, pc, viscosity, bore_length, holes)
End Function

Public Function LP_ORIFICE_DROP(Optional flow, Optional bore, Optional pipe, Optional density, Optional viscosity, Optional bore_length, Optional holes, Optional taps)
    LP_ORIFICE_DROP = LpCell("LP_ORIFICE_DROP", flow, bore, pipe, density, viscosity, bore_length, holes, taps)
End Function

Public Function LP_ORIFICE_FL(Optional bore, Optional pipe, Optional bore_length, Optional holes)
    LP_ORIFICE_FL = LpCell("LP_ORIFICE_FL", bore, pipe, bore_length, holes)
End Function

Public Function LP_ORIFICE_FLOW(Optional p1, Optional p2, Optional bore, Optional pipe, Optional density, Optional pv, Optional pc, Optional viscosity, Optional bore_length, Optional holes)
    LP_ORIFICE_FLOW = LpCell("LP_ORIFICE_FLOW", p1, p2, bore, pipe, density, pv, pc, viscosity, bore_length, holes)
End Function

Public Function LP_ORIFICE_LIMIT(Optional limit, Optional bore, Optional pipe, Optional bore_length, Optional holes, Optional p1, Optional pv, Optional pc, Optional form)
    LP_ORIFICE_LIMIT = LpCell("LP_ORIFICE_LIMIT", limit, bore, pipe, bore_length, holes, p1, pv, pc, form)
End Function

Public Function LP_ORIFICE_LOSS(Optional bore, Optional pipe, Optional bore_length, Optional holes, Optional reynolds)
    LP_ORIFICE_LOSS = LpCell("LP_ORIFICE_LOSS", bore, pipe, bore_length, holes, reynolds)
End Function

Public Function LP_PLATE_THICKNESS(Optional drop, Optional support_diameter, Optional bore, Optional stress, Optional support, Optional allowance)
    LP_PLATE_THICKNESS = LpCell("LP_PLATE_THICKNESS", drop, support_diameter, bore, stress, support, allowance)
End Function

Public Function LP_STAGES(Optional p1, Optional p2, Optional pv, Optional target, Optional form)
    LP_STAGES = LpCell("LP_STAGES", p1, p2, pv, target, form)
End Function

Public Function LP_STAGE_PRESSURES(Optional p1, Optional p2, Optional pv, Optional stages, Optional rule)
    LP_STAGE_PRESSURES = LpCell("LP_STAGE_PRESSURES", p1, p2, pv, stages, rule)
End Function
