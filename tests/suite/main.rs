mod chem;
