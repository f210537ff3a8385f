Option Explicit

Public Function LPU_CHOKED_DROP(Optional p1, Optional pv, Optional pc, Optional fl, Optional coefficient, Optional valve_size, Optional pipe_in, Optional pipe_out)
    LPU_CHOKED_DROP = LpCell("LPU_CHOKED_DROP", p1, pv, pc, fl, coefficient, valve_size, pipe_in, pipe_out)
End Function

Public Function LPU_COEFFICIENT(Optional flow, Optional p1, Optional p2, Optional pv, Optional pc, Optional density, Optional fl, Optional valve_size, Optional pipe_in, Optional pipe_out, Optional viscosity, Optional fd, Optional trim)
    LPU_COEFFICIENT = LpCell("LPU_COEFFICIENT", flow, p1, p2, pv, pc, density, fl, valve_size, pipe_in, pipe_out, viscosity, fd, trim)
End Function

Public Function LPU_DROP(Optional flow, Optional coefficient, Optional p1, Optional pv, Optional pc, Optional density, Optional fl, Optional valve_size, Optional pipe_in, Optional pipe_out, Optional viscosity, Optional fd, Optional trim)
    LPU_DROP = LpCell("LPU_DROP", flow, coefficient, p1, pv, pc, density, fl, valve_size, pipe_in, pipe_out, viscosity, fd, trim)
End Function

Public Function LPU_FLASH(Optional fluid, Optional t, Optional p1, Optional p2)
    LPU_FLASH = LpCell("LPU_FLASH", fluid, t, p1, p2)
End Function

Public Function LPU_FLASH_DENSITY(Optional fluid, Optional t, Optional p1, Optional p2)
    LPU_FLASH_DENSITY = LpCell("LPU_FLASH_DENSITY", fluid, t, p1, p2)
End Function

Public Function LPU_FLOW(Optional coefficient, Optional p1, Optional p2, Optional pv, Optional pc, Optional density, Optional fl, Optional valve_size, Optional pipe_in, Optional pipe_out, Optional viscosity, Optional fd, Optional trim)
    LPU_FLOW = LpCell("LPU_FLOW", coefficient, p1, p2, pv, pc, density, fl, valve_size, pipe_in, pipe_out, viscosity, fd, trim)
End Function

Public Function LPU_FLP(Optional fl, Optional coefficient, Optional valve_size, Optional pipe_in)
    LPU_FLP = LpCell("LPU_FLP", fl, coefficient, valve_size, pipe_in)
End Function

Public Function LPU_FP(Optional coefficient, Optional valve_size, Optional pipe_in, Optional pipe_out)
    LPU_FP = LpCell("LPU_FP", coefficient, valve_size, pipe_in, pipe_out)
End Function

Public Function LPU_OPERATING_TRAVEL(Optional flow, Optional p1, Optional p2, Optional pv, Optional pc, Optional density, Optional travels, Optional coefficients, Optional fls, Optional valve_size, Optional pipe_in, Optional pipe_out)
    LPU_OPERATING_TRAVEL = LpCell("LPU_OPERATING_TRAVEL", flow, p1, p2, pv, pc, density, travels, coefficients, fls, valve_size, pipe_in, pipe_out)
End Function

Public Function LPU_VALVE_REYNOLDS(Optional flow, Optional coefficient, Optional viscosity, Optional density, Optional fl, Optional fd, Optional pipe_in)
    LPU_VALVE_REYNOLDS = LpCell("LPU_VALVE_REYNOLDS", flow, coefficient, viscosity, density, fl, fd, pipe_in)
End Function

Public Function LPU_VELOCITY(Optional flow, Optional bore)
    LPU_VELOCITY = LpCell("LPU_VELOCITY", flow, bore)
End Function

Public Function LP_AT_TRAVEL(Optional travel, Optional travels, Optional values)
    LP_AT_TRAVEL = LpCell("LP_AT_TRAVEL", travel, travels, values)
End Function

Public Function LP_CHOKED_DROP(Optional p1, Optional pv, Optional pc, Optional fl, Optional coefficient, Optional valve_size, Optional pipe_in, Optional pipe_out)
    LP_CHOKED_DROP = LpCell("LP_CHOKED_DROP", p1, pv, pc, fl, coefficient, valve_size, pipe_in, pipe_out)
End Function

Public Function LP_COEFFICIENT(Optional flow, Optional p1, Optional p2, Optional pv, Optional pc, Optional density, Optional fl, Optional valve_size, Optional pipe_in, Optional pipe_out, Optional viscosity, Optional fd, Optional trim)
    LP_COEFFICIENT = LpCell("LP_COEFFICIENT", flow, p1, p2, pv, pc, density, fl, valve_size, pipe_in, pipe_out, viscosity, fd, trim)
End Function

Public Function LP_DROP(Optional flow, Optional coefficient, Optional p1, Optional pv, Optional pc, Optional density, Optional fl, Optional valve_size, Optional pipe_in, Optional pipe_out, Optional viscosity, Optional fd, Optional trim)
    LP_DROP = LpCell("LP_DROP", flow, coefficient, p1, pv, pc, density, fl, valve_size, pipe_in, pipe_out, viscosity, fd, trim)
End Function

Public Function LP_FF(Optional pv, Optional pc)
    LP_FF = LpCell("LP_FF", pv, pc)
End Function

Public Function LP_FLASH(Optional fluid, Optional t, Optional p1, Optional p2)
    LP_FLASH = LpCell("LP_FLASH", fluid, t, p1, p2)
End Function

Public Function LP_FLASH_DENSITY(Optional fluid, Optional t, Optional p1, Optional p2)
    LP_FLASH_DENSITY = LpCell("LP_FLASH_DENSITY", fluid, t, p1, p2)
End Function

Public Function LP_FLOW(Optional coefficient, Optional p1, Optional p2, Optional pv, Optional pc, Optional density, Optional fl, Optional valve_size, Optional pipe_in, Optional pipe_out, Optional viscosity, Optional fd, Optional trim)
    LP_FLOW = LpCell("LP_FLOW", coefficient, p1, p2, pv, pc, density, fl, valve_size, pipe_in, pipe_out, viscosity, fd, trim)
End Function

Public Function LP_FLP(Optional fl, Optional coefficient, Optional valve_size, Optional pipe_in)
    LP_FLP = LpCell("LP_FLP", fl, coefficient, valve_size, pipe_in)
End Function

Public Function LP_FP(Optional coefficient, Optional valve_size, Optional pipe_in, Optional pipe_out)
    LP_FP = LpCell("LP_FP", coefficient, valve_size, pipe_in, pipe_out)
End Function

Public Function LP_OPERATING_TRAVEL(Optional flow, Optional p1, Optional p2, Optional pv, Optional pc, Optional density, Optional travels, Optional coefficients, Optional fls, Optional valve_size, Optional pipe_in, Optional pipe_out)
    LP_OPERATING_TRAVEL = LpCell("LP_OPERATING_TRAVEL", flow, p1, p2, pv, pc, density, travels, coefficients, fls, valve_size, pipe_in, pipe_out)
End Function

Public Function LP_THROAT_PRESSURE(Optional p1, Optional p2, Optional fl, Optional pv, Optional pc)
    LP_THROAT_PRESSURE = LpCell("LP_THROAT_PRESSURE", p1, p2, fl, pv, pc)
End Function

Public Function LP_TRAVEL(Optional coefficient, Optional rated, Optional characteristic, Optional rangeability)
    LP_TRAVEL = LpCell("LP_TRAVEL", coefficient, rated, characteristic, rangeability)
End Function

Public Function LP_TYPICAL(Optional style, Optional property_, Optional direction)
    LP_TYPICAL = LpCell("LP_TYPICAL", style, property_, direction)
End Function

Public Function LP_VALVE_REYNOLDS(Optional flow, Optional coefficient, Optional viscosity, Optional density, Optional fl, Optional fd, Optional pipe_in)
    LP_VALVE_REYNOLDS = LpCell("LP_VALVE_REYNOLDS", flow, coefficient, viscosity, density, fl, fd, pipe_in)
End Function

Public Function LP_VELOCITY(Optional flow, Optional bore)
    LP_VELOCITY = LpCell("LP_VELOCITY", flow, bore)
End Function
