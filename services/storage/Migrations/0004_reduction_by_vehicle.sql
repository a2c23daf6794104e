-- What a vehicle's streams told is read vehicle by vehicle.
CREATE INDEX reduction_vehicle ON analysis.reduction (depot, vehicle_id);
