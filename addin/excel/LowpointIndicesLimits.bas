Option Explicit

Public Function LPU_ALLOWED_TEMPERATURE(Optional fluid, Optional p1, Optional p2, Optional limit, Optional form)
    LPU_ALLOWED_TEMPERATURE = LpCell("LPU_ALLOWED_TEMPERATURE", fluid, p1, p2, limit, form)
End Function

Public Function LPU_LIMIT_INSTALLED(Optional limit, Optional coefficient, Optional valve_size, Optional pipe_in, Optional pipe_out)
    LPU_LIMIT_INSTALLED = LpCell("LPU_LIMIT_INSTALLED", limit, coefficient, valve_size, pipe_in, pipe_out)
End Function

Public Function LPU_NOISE(Optional flow, Optional p1, Optional p2, Optional pv, Optional density, Optional sound_speed, Optional coefficient, Optional fl, Optional fd, Optional valve_size, Optional pipe_bore, Optional pipe_wall, Optional xfz, Optional outlet_size)
    LPU_NOISE = LpCell("LPU_NOISE", flow, p1, p2, pv, density, sound_speed, coefficient, fl, fd, valve_size, pipe_bore, pipe_wall, xfz, outlet_size)
End Function

Public Function LPU_SIGMA_CHOKED(Optional p1, Optional pv, Optional pc, Optional fl, Optional coefficient, Optional valve_size, Optional pipe_in, Optional pipe_out)
    LPU_SIGMA_CHOKED = LpCell("LPU_SIGMA_CHOKED", p1, pv, pc, fl, coefficient, valve_size, pipe_in, pipe_out)
End Function

Public Function LPU_XFZ(Optional coefficient, Optional fl, Optional fd, Optional p1)
    LPU_XFZ = LpCell("LPU_XFZ", coefficient, fl, fd, p1)
End Function

Public Function LP_ALLOWED_DROP(Optional p1, Optional pv, Optional limit, Optional form)
    LP_ALLOWED_DROP = LpCell("LP_ALLOWED_DROP", p1, pv, limit, form)
End Function

Public Function LP_ALLOWED_INLET(Optional p2, Optional pv, Optional limit, Optional form)
    LP_ALLOWED_INLET = LpCell("LP_ALLOWED_INLET", p2, pv, limit, form)
End Function

Public Function LP_ALLOWED_OUTLET(Optional p1, Optional pv, Optional limit, Optional form)
    LP_ALLOWED_OUTLET = LpCell("LP_ALLOWED_OUTLET", p1, pv, limit, form)
End Function

Public Function LP_ALLOWED_TEMPERATURE(Optional fluid, Optional p1, Optional p2, Optional limit, Optional form)
    LP_ALLOWED_TEMPERATURE = LpCell("LP_ALLOWED_TEMPERATURE", fluid, p1, p2, limit, form)
End Function

Public Function LP_LIMIT_INSTALLED(Optional limit, Optional coefficient, Optional valve_size, Optional pipe_in, Optional pipe_out)
    LP_LIMIT_INSTALLED = LpCell("LP_LIMIT_INSTALLED", limit, coefficient, valve_size, pipe_in, pipe_out)
End Function

Public Function LP_MARGIN(Optional sigma, Optional limit)
    LP_MARGIN = LpCell("LP_MARGIN", sigma, limit)
End Function

Public Function LP_NOISE(Optional flow, Optional p1, Optional p2, Optional pv, Optional density, Optional sound_speed, Optional coefficient, Optional fl, Optional fd, Optional valve_size, Optional pipe_bore, Optional pipe_wall, Optional xfz, Optional outlet_size)
    LP_NOISE = LpCell("LP_NOISE", flow, p1, p2, pv, density, sound_speed, coefficient, fl, fd, valve_size, pipe_bore, pipe_wall, xfz, outlet_size)
End Function

Public Function LP_REGIME(Optional sigma, Optional incipient, Optional constant, Optional damage, Optional vibration, Optional choked)
    LP_REGIME = LpCell("LP_REGIME", sigma, incipient, constant, damage, vibration, choked)
End Function

Public Function LP_SIGMA(Optional p1, Optional p2, Optional pv, Optional form)
    LP_SIGMA = LpCell("LP_SIGMA", p1, p2, pv, form)
End Function

Public Function LP_SIGMA_CHOKED(Optional p1, Optional pv, Optional pc, Optional fl, Optional coefficient, Optional valve_size, Optional pipe_in, Optional pipe_out)
    LP_SIGMA_CHOKED = LpCell("LP_SIGMA_CHOKED", p1, pv, pc, fl, coefficient, valve_size, pipe_in, pipe_out)
End Function

Public Function LP_SIGMA_FORM(Optional value, Optional from_, Optional to_)
    LP_SIGMA_FORM = LpCell("LP_SIGMA_FORM", value, from_, to_)
End Function

Public Function LP_SIGMA_SCALED(Optional limit, Optional size, Optional size_ref, Optional head, Optional head_ref, Optional size_exponent, Optional head_exponent, Optional method)
    LP_SIGMA_SCALED = LpCell("LP_SIGMA_SCALED", limit, size, size_ref, head, head_ref, size_exponent, head_exponent, method)
End Function

Public Function LP_XFZ(Optional coefficient, Optional fl, Optional fd, Optional p1)
    LP_XFZ = LpCell("LP_XFZ", coefficient, fl, fd, p1)
End Function
